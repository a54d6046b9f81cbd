"""The command line: answers, exit statuses, and one clear line for everything that is wrong."""

from __future__ import annotations

import json
import os
import re
import subprocess
import sys
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from app import verbs
from app.command_line import VERBS, main
from core.chip.plan import ChipChannel, ChipPlan
from core.fabrication.making import making_of
from core.fabrication.process import ProcessKind
from core.fabrication.shipped import shipped_process
from core.findings import Finding, Severity
from core.geometry import shape as shape_module
from core.hydraulics.estimate import estimate
from core.parameters import ChannelParameters
from core.project import ChipProject, ParameterSet, checks, read_project, write_project

ROOT = Path(__file__).parents[2]
SAMPLE = ROOT / "sample_designs" / "cell-rinse-return.sideloop"

# the contract that scripts rely on
SCORE_KEYS = {
    "forward_pressure_pa", "reverse_pressure_pa", "diodicity", "reynolds", "flow_ul_min", "loop_share_forward",
    "loop_share_reverse", "method", "error_band_percent", "valid", "notes",
}  # fmt: skip
FINDING_KEYS = {"code", "severity", "message", "value_um", "limit_um", "x_um", "y_um", "set", "cure"}

IMPOSSIBLE = "--with=loop_radius_um=10"  # with a loop 200 um wide nothing of the island is left


@pytest.fixture
def run(capsys):
    """Return a function that answers a command line: status, standard output, standard error."""

    def answer(*words: object) -> tuple[int, str, str]:
        status = main([str(word) for word in words])
        captured = capsys.readouterr()
        return status, captured.out, captured.err

    return answer


@pytest.fixture
def refused(run):
    """Return a function that answers a command line which must be refused as bad input."""

    def complaint(*words: object) -> str:
        status, out, err = run(*words)
        assert status == 2
        assert out == ""
        assert re.fullmatch(r"sideloop: [^\n]+\n", err), err
        assert "error of the program" not in err
        return err

    return complaint


# --- score ----------------------------------------------------------------------------------


def test_score_as_json_has_the_agreed_keys(run):
    status, out, err = run("score", SAMPLE, "--json")
    score = json.loads(out)
    assert (status, err) == (0, "")
    assert set(score) >= SCORE_KEYS
    assert score["method"] == "estimate"
    assert score["flow_ul_min"] == read_project(SAMPLE).operating.flow_ul_min
    assert score["diodicity"] == pytest.approx(score["reverse_pressure_pa"] / score["forward_pressure_pa"], rel=1e-9)
    assert isinstance(score["valid"], bool)
    assert all(isinstance(note, str) for note in score["notes"])


def test_several_flows_stand_under_points(run):
    _, out, _ = run("score", SAMPLE, "--json", "--flow-ul-min", "100, 200,400")
    ((key, points),) = json.loads(out).items()
    assert key == "points"
    assert [point["flow_ul_min"] for point in points] == [100.0, 200.0, 400.0]
    assert all(set(point) >= SCORE_KEYS for point in points)
    pressures = [point["forward_pressure_pa"] for point in points]
    assert pressures == sorted(pressures)


def test_one_flow_is_no_list(run):
    assert json.loads(run("score", SAMPLE, "--json", "--flow-ul-min", "100")[1])["flow_ul_min"] == 100.0


def test_overrides_change_channel_and_operating_point(run):
    # closed truth: Re = rho U D_h / mu of a straight control has no part that an option leaves alone
    words = ["score", SAMPLE, "--json", "--flow-ul-min", "60", "--with", "fluid=own", "--with", "own_density_kg_m3=800",
             "--with", "own_viscosity_mpa_s=2", "--with", "stages=0", "--with", "channel_width_um=300",
             "--with", "depth_um=100"]  # fmt: skip
    score = json.loads(run(*words)[1])
    speed_m_s, diameter_m = 1e-9 / (300e-6 * 100e-6), 2 * 300e-6 * 100e-6 / 400e-6
    assert score["reynolds"] == pytest.approx(800 * speed_m_s * diameter_m / 2e-3, rel=1e-12)
    assert score["diodicity"] == 1.0


def test_the_last_override_counts_and_the_flow_option_wins(run):
    words = ["score", SAMPLE, "--json", "--with", "flow_ul_min=10", "--with", "flow_ul_min=20"]
    assert json.loads(run(*words)[1])["flow_ul_min"] == 20.0
    assert json.loads(run(*words, "--flow-ul-min", "30")[1])["flow_ul_min"] == 30.0


def test_a_set_can_be_named(run):
    by_name = {each.name: run("score", SAMPLE, "--json", "--set", each.name)[1] for each in read_project(SAMPLE).sets}
    assert run("score", SAMPLE, "--json")[1] == next(iter(by_name.values()))
    assert len(set(by_name.values())) == len(by_name)


def test_score_in_words(run):
    status, out, _ = run("score", SAMPLE, "--flow-ul-min", "2,1400,9000")
    lines = out.splitlines()
    assert status == 0
    assert lines[0] == "Cell rinse return, set 'Four loops'"
    assert lines[1].startswith("saline at 37 degC: ")
    table = [line for line in lines if re.match(r" *(2|1400|9000) ", line)]
    assert len(table) == 3
    assert len({len(line) for line in lines[3:8]}) == 1  # columns stand under one another
    assert table[2].endswith("NO")
    assert "method: estimate" in out
    assert "  - Re 0.2" in out


def test_a_number_that_does_not_exist_is_null_in_json():
    from app.plain_text import as_json

    assert json.loads(as_json({"a": float("nan"), "b": [float("inf"), 1.0]})) == {"a": None, "b": [None, 1.0]}


def test_an_impossible_shape_has_no_score(run):
    status, out, err = run("score", SAMPLE, IMPOSSIBLE)
    assert (status, out) == (1, "")
    assert re.fullmatch(r"sideloop: set 'Four loops' cannot be made: [^\n]*raise loop_radius_um[^\n]*\n", err)


# --- what is made ---------------------------------------------------------------------------


@pytest.fixture
def glass(tmp_path):
    """Return a file whose process makes something else than what is wanted."""
    channel = ChannelParameters(channel_width_um=300, loop_width_um=300, loop_radius_um=500, depth_um=80, stages=1)
    project = ChipProject(
        name="Glass", sets=(ParameterSet(name="One", channel=channel),), process=shipped_process(ProcessKind.WET_GLASS)
    )
    write_project(project, tmp_path / "glass.sideloop")
    return tmp_path / "glass.sideloop"


def test_what_is_made_is_scored_and_the_notes_say_so(run, glass):
    # truth: the estimate asked for the parameters that the process makes
    project = read_project(glass)
    making = making_of(project.sets[0].channel, project.process)
    assert making.flow != making.wanted
    flows = np.array([project.operating.flow_ul_min])
    expected = estimate(making.flow, fluid=project.operating.fluid_state(), flows_ul_min=flows).score(0)
    score = json.loads(run("score", glass, "--json")[1])
    assert score["reverse_pressure_pa"] == pytest.approx(expected.reverse_pressure_pa, rel=1e-12)
    assert making.notes
    assert score["notes"] == [*making.notes, *expected.notes]
    assert making.notes[0] in run("score", glass)[1]


def test_what_is_made_as_wanted_has_no_such_notes(run):
    project = read_project(SAMPLE)
    making = making_of(project.sets[0].channel, project.process)
    assert making.flow == making.wanted
    assert not set(making.notes) & set(json.loads(run("score", SAMPLE, "--json")[1])["notes"])


# --- check ----------------------------------------------------------------------------------


@pytest.fixture
def plain(tmp_path):
    """Return a small chip without findings."""
    project = ChipProject(name="Plain chip", sets=(ParameterSet(name="One", channel=ChannelParameters(stages=1)),))
    write_project(project, tmp_path / "plain.sideloop")
    return tmp_path / "plain.sideloop"


def test_check_of_a_good_design(run, plain):
    assert run("check", plain) == (0, "Plain chip: no findings\n", "")
    assert run("check", plain, "--set", "One") == (0, "Plain chip, set 'One': no findings\n", "")
    assert run("check", plain, "--json")[:2] == (0, '{\n  "findings": []\n}\n')


def test_check_of_an_impossible_design(run, plain):
    status, out, err = run("check", plain, IMPOSSIBLE, "--json")
    findings = json.loads(out)["findings"]
    assert (status, err) == (1, "")
    assert findings[0]["severity"] == "error"
    assert findings[0]["set"] == "One"
    assert set(findings[0]) >= FINDING_KEYS
    status, out, _ = run("check", plain, IMPOSSIBLE)
    assert status == 1
    assert f"error   {findings[0]['code']}: " in out


def test_check_covers_process_and_chip_and_a_set_can_be_looked_at_alone(run, plain):
    project = read_project(plain)
    narrow = project.sets[0].channel.with_values({"channel_width_um": 40, "loop_width_um": 40, "depth_um": 40})
    project = project.with_set_added(ParameterSet(name="Narrow", channel=narrow))
    channels = (ChipChannel(set_name="One", x_um=19_000.0), ChipChannel(set_name="Narrow"))
    write_project(project.with_plan(ChipPlan(channels=channels)), plain)
    status, out, _ = run("check", plain, "--json")
    findings = json.loads(out)["findings"]
    assert status == 1
    assert {finding["set"] for finding in findings} == {"Narrow", ""}
    assert {"depths_differ"} < {finding["code"] for finding in findings if finding["set"] == ""}
    too_narrow = next(f for f in findings if f["set"] == "Narrow" and f["field"] == "channel_width_um")
    assert (too_narrow["value_um"], too_narrow["limit_um"]) == (pytest.approx(40.0), 50.0)
    cured = [
        f"--with={f['cure']['field']}={f['cure']['value']}" for f in findings if f["set"] == "Narrow" and f["cure"]
    ]
    assert cured
    assert run("check", plain, "--set", "One", "--json")[:2] == (0, '{\n  "findings": []\n}\n')
    status, out, _ = run("check", plain, "--set", "Narrow")
    assert status == 1
    assert out.startswith("Plain chip, set 'Narrow': ")
    assert f"try {too_narrow['field']}=" in out


def finding(severity: Severity) -> Finding:
    return Finding(
        code="made_up", severity=severity, message="for the test", field="stages", x_um=10.0, y_um=-20.4,
        cure=("stages", 3),
    )  # fmt: skip


@pytest.fixture
def with_finding(monkeypatch):
    """Return a function that gives every shape a finding, its outline left as it is."""
    build_shape = shape_module.build_shape

    def add(severity: Severity) -> None:
        def build(parameters):
            return replace(build_shape(parameters), findings=(finding(severity),))

        for module in (shape_module, checks):
            monkeypatch.setattr(module, "build_shape", build)

    return add


def test_a_warning_is_told_but_is_no_error(run, plain, with_finding):
    with_finding(Severity.WARNING)
    status, out, _ = run("check", plain)
    assert status == 0
    assert out.endswith("1 finding\n  warning made_up: for the test (set 'One'; at 10, -20 um; try stages=3)\n")


# --- masks of the chip ----------------------------------------------------------------------


def test_masks_of_the_chip(run, plain, tmp_path):
    status, out, err = run("masks", plain, "--out", tmp_path / "new" / "masks", "--json")
    report = json.loads(out)
    names = sorted(file["name"] for file in report["files"])
    assert (status, err) == (0, "")
    assert names == sorted(each.name for each in (tmp_path / "new" / "masks").iterdir())
    assert {Path(name).suffix for name in names} >= {".dxf", ".gds", ".txt", ".pdf", ".zip"}
    assert report["left_out"] == []
    assert "Read back: " in run("masks", plain, "--out", tmp_path / "again")[1]


def test_masks_of_a_chip_with_errors_are_refused_and_written_by_force(run, plain, tmp_path):
    channels = (ChipChannel(set_name="One", x_um=19_000.0),)
    write_project(read_project(plain).with_plan(ChipPlan(channels=channels)), plain)
    words = ["masks", plain, "--out", tmp_path / "masks"]
    status, out, err = run(*words)
    assert (status, out) == (1, "")
    assert re.fullmatch(r"sideloop: chip 'Plain chip' cannot be made: [^\n]*add --force\n", err)
    assert not (tmp_path / "masks").exists()
    assert run(*words, "--force")[0] == 0
    (sheet,) = (tmp_path / "masks").glob("*_ORDER.txt")
    assert "edge" in sheet.read_text(encoding="utf-8")


# --- masks of bare channels -----------------------------------------------------------------


def test_bare_masks_of_one_set(run, tmp_path):
    status, out, err = run("masks", SAMPLE, "--set", "Four loops", "--out", tmp_path / "new" / "masks", "--json")
    report = json.loads(out)
    names = sorted(file["name"] for file in report["files"])
    assert (status, err) == (0, "")
    assert names == sorted(each.name for each in (tmp_path / "new" / "masks").iterdir())
    assert {Path(name).suffix for name in names} >= {".dxf", ".gds", ".txt"}
    assert report["left_out"] == []


def test_masks_in_words_and_of_all_sets(run, tmp_path):
    status, out, _ = run("masks", SAMPLE, "--out", tmp_path, "--all-sets")
    assert status == 0
    written = [each for each in tmp_path.iterdir() if each.suffix == ".gds"]
    assert len(written) == len(read_project(SAMPLE).sets)
    assert all(each.name in out for each in written)
    assert "Read back: 1 channel with 4 islands, as drawn" in out


@pytest.mark.parametrize("which", [[], ["--set", "Four loops"]])
@pytest.mark.parametrize("force", [[], ["--force"]])
def test_masks_of_an_impossible_design_are_refused(run, tmp_path, which, force):
    status, out, err = run("masks", SAMPLE, "--out", tmp_path / "masks", IMPOSSIBLE, *which, *force)
    assert (status, out) == (1, "")
    assert err.count("\n") == 1
    assert not (tmp_path / "masks").exists()


def test_force_writes_what_has_an_outline(run, tmp_path, with_finding):
    with_finding(Severity.ERROR)
    words = ["masks", SAMPLE, "--set", "Four loops", "--out", tmp_path / "masks"]
    status, _, err = run(*words)
    assert status == 1
    assert "for the test; cure it, or add --force" in err
    assert not (tmp_path / "masks").exists()
    assert run(*words, "--force")[0] == 0
    assert list((tmp_path / "masks").glob("*.gds"))


def test_force_leaves_out_sets_without_an_outline_and_says_so(run, tmp_path):
    project = read_project(SAMPLE)
    bad = ParameterSet(name="Bad one", channel=project.sets[0].channel.with_values({"loop_radius_um": 10}))
    file = tmp_path / "mixed.sideloop"
    write_project(project.with_set_added(bad), file)
    words = ["masks", file, "--out", tmp_path / "masks", "--all-sets"]
    status, _, err = run(*words)
    assert status == 1
    assert "set 'Bad one' cannot be made" in err
    assert "--force to leave it out" in err
    status, out, _ = run(*words, "--force")
    assert status == 0
    assert "left out, because they cannot be drawn (see 'check'):\n  - Bad one" in out
    assert json.loads(run(*words, "--force", "--json")[1])["left_out"] == ["Bad one"]
    assert len(list((tmp_path / "masks").glob("*.gds"))) == len(project.sets)


# --- bad input ------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("override", "parts"),
    [
        ("loop_angel_deg=45", ["loop_angel_deg", "did you mean 'loop_angle_deg'?"]),
        ("depth=45", ["did you mean 'depth_um'?"]),
        ("loop_angle_deg=wide", ["loop_angle_deg is 'wide'", "10 to 120 deg", "give a number"]),
        ("loop_angle_deg=nan", ["loop_angle_deg is 'nan'", "give a finite number"]),
        ("loop_angle_deg=-inf", ["loop_angle_deg is '-inf'", "give a finite number"]),
        ("loop_angle_deg=121", ["loop_angle_deg is '121'", "lower it to at most 120"]),
        ("depth_um=0", ["depth_um is '0'", "1 to 3000 um", "raise it to at least 1"]),
        ("stages=2.5", ["stages is '2.5'", "give a whole number"]),
        ("stages=101", ["stages is '101'", "whole number from 0 to 100"]),
        ("sides=both", ["sides is 'both'", "alternate, same"]),
        ("fluid=watr", ["fluid is 'watr'", "did you mean 'water'?"]),
        ("temperature_c=1e9", ["temperature_c is '1e9'", "0 to 100 degC"]),
        ("depth_um=", ["depth_um is ''"]),
        ("depth_um", ["has no value", "--with FIELD=VALUE"]),
        ("=5", ["known names: "]),
        ("two\nlines=5", ["two lines"]),
    ],
)
@pytest.mark.parametrize("verb", ["score", "check"])
def test_unusable_overrides(refused, verb, override, parts):
    message = refused(verb, SAMPLE, "--with", override)
    for part in parts:
        assert part in message


@pytest.mark.parametrize("flow", ["", "fast", "nan", "-5", "0", "1e7", "100,,200", "100,x", "inf"])
def test_unusable_flows(refused, flow):
    message = refused("score", SAMPLE, f"--flow-ul-min={flow}")
    assert "flow_ul_min is " in message
    assert "0.001 to 1e+06 uL/min" in message


def test_a_fluid_outside_its_temperature_range(refused):
    message = refused("score", SAMPLE, "--with", "fluid=ethanol", "--with", "temperature_c=95")
    assert "temperature_c is 95" in message
    assert "ethanol" in message


def test_unknown_set(refused):
    assert "did you mean 'Four loops'?" in refused("score", SAMPLE, "--set", "four loops")


@pytest.mark.parametrize("verb", ["open", "score", "check"])
@pytest.mark.parametrize(
    ("content", "part"),
    [
        (None, "no such file"),
        (b"", "empty"),
        (bytes(range(256)), "binary"),
        (b"no json", "no valid JSON at line 1"),
        (b'{"format": "sideloop chip project", "schema": 1, "sets": [{"name": "a"}, {"name": "A"}]}', "another name"),
        (b'{"format": "sideloop chip project", "schema": 99, "sets": [{"name": "a"}]}', "newer Sideloop"),
    ],
)
def test_unusable_files(refused, tmp_path, verb, content, part):
    file = tmp_path / "some.sideloop"
    if content is not None:
        file.write_bytes(content)
    assert part in refused(verb, file)


def test_a_folder_is_no_file(refused, tmp_path):
    assert "it is a folder" in refused("score", tmp_path)


def test_masks_into_a_place_that_is_no_folder(refused, tmp_path):
    (tmp_path / "file").write_text("x")
    refused("masks", SAMPLE, "--out", tmp_path / "file")
    assert (tmp_path / "file").read_text() == "x"


@pytest.mark.parametrize(
    ("words", "part"),
    [
        (["scor", SAMPLE], "did you mean 'score'?"),
        (["banana"], "known names: open, score, solve, check, masks"),
        ([SAMPLE], "write 'open "),
        (["score"], "required: FILE"),
        (["masks", SAMPLE], "required: --out"),
        (["score", SAMPLE, "--sett", "x"], "did you mean '--set'?"),
        (["score", SAMPLE, "--out", "x"], "'--out' is too much for score"),
        (["score", SAMPLE, "second"], "'second' is too much for score"),
        (["score", SAMPLE, "--set"], "expected one argument"),
        (["--json", "score", SAMPLE], "--json"),
        (["-x"], "-x"),
        (["masks", SAMPLE, "--out", "x", "--set", "Four loops", "--all-sets"], "exclude one another"),
    ],
)
def test_wrong_command_lines(refused, words, part):
    assert part in refused(*words)


def test_help_lists_every_verb(run):
    status, out, _ = run("--help")
    assert status == 0
    assert all(f"    {name} " in out for name in VERBS)
    assert run("score", "--help")[0] == 0


# --- the edges of the process ---------------------------------------------------------------


def test_a_defect_of_the_program_is_one_line_too(run, monkeypatch):
    def fail(_path):
        raise ZeroDivisionError("a defect\nin two lines")

    monkeypatch.setattr(verbs, "read_project", fail)
    status, out, err = run("score", SAMPLE)
    assert (status, out) == (2, "")
    assert (
        err == "sideloop: an error of the program itself, not of your input: ZeroDivisionError: a defect in two lines\n"
    )


def test_an_interruption_is_no_traceback(run, monkeypatch):
    def stop(_path):
        raise KeyboardInterrupt

    monkeypatch.setattr(verbs, "read_project", stop)
    assert run("score", SAMPLE) == (130, "", "sideloop: stopped\n")


def process(*words: object, **options: object) -> subprocess.CompletedProcess[str]:
    """Answer a command line in a process of its own."""
    command = [sys.executable, "-m", "app", *map(str, words)]
    return subprocess.run(command, cwd=ROOT, capture_output=True, text=True, check=False, **options)


def test_from_outside():
    done = process("score", SAMPLE, "--json")
    assert (done.returncode, done.stderr) == (0, "")
    assert set(json.loads(done.stdout)) >= SCORE_KEYS
    done = process("score", SAMPLE, "--with", "stages=x")
    assert (done.returncode, done.stdout, done.stderr.count("\n")) == (2, "", 1)
    assert process("check", SAMPLE, IMPOSSIBLE).returncode == 1


def test_names_beyond_the_screen_s_letters(tmp_path):
    project = ChipProject(name="Spülchip Ω", sets=(ParameterSet(name="Schleife ☂"),))
    write_project(project, tmp_path / "a.sideloop")
    ascii_only = {**os.environ, "PYTHONIOENCODING": "ascii:strict"}
    done = process("check", tmp_path / "a.sideloop", "--set", "Schleife ☂", env=ascii_only)
    assert done.returncode == 0
    assert done.stdout == "Sp\\xfclchip \\u03a9, set 'Schleife \\u2602': no findings\n"
    assert "will say SPULCHIP" in process("check", tmp_path / "a.sideloop", env=ascii_only).stdout


@pytest.mark.skipif(os.name != "posix", reason="a pipe as POSIX has it")
def test_a_reader_that_closes_early():
    command = [sys.executable, "-m", "app", "score", str(SAMPLE), "--json"]
    with subprocess.Popen(command, cwd=ROOT, stdout=subprocess.PIPE, stderr=subprocess.PIPE) as child:
        child.stdout.close()
        assert child.stderr.read() == b""
        assert child.wait() == 0


@pytest.mark.skipif(not Path("/dev/full").exists(), reason="needs a device that is always full")
def test_standard_output_on_a_full_disk():
    with Path("/dev/full").open("w") as full:
        command = [sys.executable, "-m", "app", "score", str(SAMPLE)]
        done = subprocess.run(command, cwd=ROOT, stdout=full, stderr=subprocess.PIPE, text=True, check=False)
    assert done.returncode == 2
    assert done.stderr == "sideloop: standard output cannot be written: No space left on device\n"


LOADED = """
import sys
from app.command_line import main
status = main(sys.argv[1:])
heavy = {"PySide6", "shiboken6", "pyqtgraph", "scipy", "shapely", "ezdxf", "gdstk", "CoolProp", "skfem", "netgen"}
print("loaded:", *sorted(heavy & set(sys.modules)))
sys.exit(status)
"""


@pytest.mark.parametrize(
    ("words", "allowed"),
    [(["score"], set()), (["check"], set()), (["masks", "--out"], {"scipy", "shapely", "ezdxf", "gdstk"})],
)
def test_what_a_verb_loads(tmp_path, words, allowed):
    command = [sys.executable, "-c", LOADED, words[0], str(SAMPLE), *words[1:], *([str(tmp_path)] if words[1:] else [])]
    done = subprocess.run(command, cwd=ROOT, capture_output=True, text=True, check=True)
    loaded = set(done.stdout.splitlines()[-1].removeprefix("loaded:").split())
    assert loaded <= allowed


NO_WINDOW = """
import sys
sys.modules["PySide6"] = None  # as if it were not installed
from app.command_line import main
sys.exit(main(["open", sys.argv[1]]))
"""


def test_a_missing_window_library_is_told_in_words():
    command = [sys.executable, "-c", NO_WINDOW, str(SAMPLE)]
    done = subprocess.run(command, cwd=ROOT, capture_output=True, text=True, check=False)
    assert done.returncode == 2
    assert re.fullmatch(r"sideloop: the window cannot open here \([^\n]*PySide6[^\n]*\); [^\n]*\n", done.stderr)


@pytest.mark.parametrize(("words", "expected"), [([], None), (["open", str(SAMPLE)], SAMPLE)])
def test_the_window_is_opened_on_the_file(monkeypatch, words, expected):
    opened = []
    stand_in = type(sys)("app.opening")
    stand_in.run_window = lambda path: opened.append(path) or 0
    monkeypatch.setitem(sys.modules, "app.opening", stand_in)
    assert main(words) == 0
    assert opened == [expected]

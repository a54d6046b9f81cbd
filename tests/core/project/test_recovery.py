"""Unsaved work that outlives its process."""

from __future__ import annotations

import subprocess
import sys
import textwrap
from datetime import UTC, datetime, timedelta
from pathlib import Path

import pytest

from core.project import RecoveryStore, new_project
from core.project import recovery as recovery_module
from core.project.files import project_bytes
from tests.core.project.builders import rinse_project

ROOT = Path(__file__).parents[3]


def crash_after_keeping(folder: Path, original_path: str | None) -> None:
    """Keep the small project in another process, which then dies at once."""
    program = f"""
        import os
        from pathlib import Path
        from core.project import RecoveryStore
        from tests.core.project.builders import rinse_project
        original = {original_path!r}
        store = RecoveryStore(Path({str(folder)!r}))
        assert store.keep(rinse_project(), None if original is None else Path(original))
        os._exit(9)
    """
    done = subprocess.run([sys.executable, "-c", textwrap.dedent(program)], cwd=ROOT, check=False)
    assert done.returncode == 9


@pytest.mark.parametrize("original", [None, "/somewhere/chip ä.sideloop"])
def test_work_of_a_dead_process_is_offered_until_discarded(tmp_path, original):
    crash_after_keeping(tmp_path, original)
    store = RecoveryStore(tmp_path)
    (offer,) = store.offers()
    assert offer.project == rinse_project()
    assert offer.original_path == (None if original is None else Path(original))
    assert abs(datetime.now(UTC) - offer.kept_at) < timedelta(minutes=5)
    assert store.offers() == (offer,)
    assert store.discard(offer)
    assert store.offers() == ()
    assert list(tmp_path.iterdir()) == []


def test_work_of_a_living_process_is_not_offered(tmp_path):
    mine, other = RecoveryStore(tmp_path), RecoveryStore(tmp_path)
    assert mine.keep(rinse_project())
    assert mine.offers() == ()
    assert other.offers() == ()
    assert mine.discard()
    assert list(tmp_path.iterdir()) == []


def test_only_the_latest_state_is_kept(tmp_path):
    store = RecoveryStore(tmp_path)
    assert store.keep(new_project())
    assert store.keep(rinse_project())
    assert store.discard()
    assert store.keep(rinse_project())
    assert len(list(tmp_path.glob("*.recovery"))) == 1
    store.discard()


def test_the_newest_comes_first(tmp_path):
    crash_after_keeping(tmp_path, "/first")
    crash_after_keeping(tmp_path, "/second")
    assert [str(offer.original_path) for offer in RecoveryStore(tmp_path).offers()] == ["/second", "/first"]


def test_files_that_are_no_copies_are_passed_over(tmp_path):
    crash_after_keeping(tmp_path, None)
    good = next(tmp_path.glob("*.recovery")).read_bytes()
    contents = [b"", b"{", b"[]", b"\xff", project_bytes(rinse_project()), good[: len(good) // 2],
                good.replace(b'"kept_at"', b'"lost_at"'), good.replace(b"20", b"xx", 1),
                good.replace(b'"original_path": null', b'"original_path": 7')]  # fmt: skip
    for number, content in enumerate(contents):
        (tmp_path / f"{number}.recovery").write_bytes(content)
    (tmp_path / "folder.recovery").mkdir()
    assert len(RecoveryStore(tmp_path).offers()) == 1


def test_a_failing_disk_never_stops_the_work(tmp_path, monkeypatch):
    in_the_way = tmp_path / "file"
    in_the_way.write_text("x")
    store = RecoveryStore(in_the_way / "folder")
    outcome = store.keep(rinse_project())
    assert not outcome
    assert "no recovery copy could be kept" in outcome.message
    assert store.offers() == ()
    assert store.discard()

    def refuse(*_args, **_kwargs):
        raise OSError(28, "No space left on device")

    store = RecoveryStore(tmp_path / "copies")
    assert store.keep(rinse_project())
    monkeypatch.setattr(recovery_module, "save_bytes", refuse)
    assert "No space left" in store.keep(new_project()).message
    monkeypatch.setattr(Path, "unlink", refuse)
    assert "could not be removed" in store.discard().message
    monkeypatch.undo()
    assert store.discard()

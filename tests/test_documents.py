"""What the documents say can be done can be done."""

from __future__ import annotations

import re
import shlex
from pathlib import Path

import pytest

from app.command_line import VERBS, main

ROOT = Path(__file__).resolve().parents[1]
README = (ROOT / "README.md").read_text(encoding="utf-8")
COMMANDS = re.findall(r"^python3 app/start\.py (?!open)(.+)$", README, flags=re.MULTILINE)


def test_readme_has_examples():
    assert {command.split()[0] for command in COMMANDS} == set(VERBS) - {"open"}


@pytest.mark.parametrize("command", COMMANDS)
def test_examples_of_the_readme_work(command, tmp_path, monkeypatch, capsys):
    monkeypatch.chdir(ROOT)
    words = [str(tmp_path) if word == "masks_out" else word for word in shlex.split(command)]
    assert main(words) == 0
    assert capsys.readouterr().out


@pytest.mark.parametrize("document", ["README.md", "DEVELOPERS.md"])
def test_named_files_exist(document):
    text = (ROOT / document).read_text(encoding="utf-8")
    links = [link for link in re.findall(r"\]\(([^)]+)\)", text) if "://" not in link]
    paths = re.findall(r"`((?:app|core|tests|sample_designs)/[\w./-]+)`", text)
    assert links or paths
    assert [name for name in links + paths if not (ROOT / name).exists()] == []

"""What each command loads: nobody waits for a library that the command does not use."""

from __future__ import annotations

import json
import subprocess
import sys
from pathlib import Path

import pytest

HEAVY = {
    "numpy",
    "scipy",
    "pandas",
    "jsonschema",
    "jsonschema_rs",
    "tree_sitter",
    "rich",
    "matplotlib",
}
DRIVER = """
import json, sys
from screener.cli import run
code = run(sys.argv[2:])
loaded = [name for name in sys.argv[1].split(",") if name in sys.modules]
print(json.dumps([code, loaded]), file=sys.stderr)
"""
READ = {"numpy", "jsonschema_rs"}


@pytest.mark.parametrize(
    ("command", "may"),
    [
        ("--help", set()),
        ("shortlist --help", set()),
        ("case new DIR/fresh", set()),
        ("shortlist DIR/case.toml", READ | {"rich"}),
        ("header DIR/case.toml --format json", READ),
        ("trims DIR/case.toml A --format csv", READ),
        ("catalog check DIR/pumps", READ),
    ],
)
def test_a_command_loads_no_more_than_it_needs(command: str, may: set[str], plant: Path) -> None:
    words = command.replace("DIR", str(plant)).split(" ")
    done = subprocess.run(
        [sys.executable, "-c", DRIVER, ",".join(sorted(HEAVY)), *words], capture_output=True, text=True
    )
    code, loaded = json.loads(done.stderr.splitlines()[-1])
    assert code == 0
    assert set(loaded) <= may


def test_a_problem_loads_what_finds_its_place(plant: Path) -> None:
    """The test above can fail: a bad file needs the libraries that it forbids."""
    (plant / "case.toml").write_text('format = "pump-case/1"\n')
    command = [sys.executable, "-c", DRIVER, ",".join(sorted(HEAVY)), "case", "check", plant / "case.toml"]
    done = subprocess.run(command, capture_output=True, text=True)
    code, loaded = json.loads(done.stderr.splitlines()[-1])
    assert code == 3
    assert {"jsonschema", "tree_sitter"} <= set(loaded)

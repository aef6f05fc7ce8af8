"""Runs the program as users do, with the user's folders in a place of their own."""

from __future__ import annotations

import csv
import io
import sys
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import pytest

from wanderers.cli import main

HILL = ("--site", "52.13,11.62,120", "--zone", "Europe/Berlin")
RIDGE = ("--site", "-35.3,149.1,780", "--zone", "Australia/Sydney")


@dataclass(frozen=True)
class Outcome:
    """What a run of the program left: exit status, standard output, standard error."""

    status: int
    out: str
    err: str


class Program:
    """The program, started in one folder."""

    def __init__(self, monkeypatch: pytest.MonkeyPatch, capsys: Any, *last: str) -> None:
        """Take what pytest offers, and the arguments that end every line."""
        self.monkeypatch, self.capsys, self.last = monkeypatch, capsys, last

    def __call__(self, *arguments: str) -> Outcome:
        """Run one line."""
        self.capsys.readouterr()
        self.monkeypatch.setattr(sys, "argv", ["wanderers", *arguments, *self.last])
        status = 0
        try:
            main.main()
        except SystemExit as leaving:
            status = int(leaving.code or 0)
        captured = self.capsys.readouterr()
        return Outcome(status, captured.out, captured.err)


def at_home(monkeypatch: pytest.MonkeyPatch, folder: Path) -> None:
    """Make a folder the working folder, and another below it the user's configuration folder."""
    monkeypatch.chdir(folder)
    monkeypatch.setenv("XDG_CONFIG_HOME", str(folder / "config"))
    monkeypatch.delenv("WANDERERS_KERNEL", raising=False)


def rows_of(text: str) -> list[dict[str, str]]:
    """Return the rows of a table written as CSV."""
    return list(csv.DictReader(io.StringIO(text)))

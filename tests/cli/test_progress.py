"""The line of progress of long builds."""

from __future__ import annotations

import pytest

from wanderers.cli.options import ProgressLine, time_left, told_once


def test_the_line_tells_the_time_left_and_ends(capsys: pytest.CaptureFixture[str]) -> None:
    clock = iter([1000.0, 1010.0, 1020.0, 1040.0])
    line = ProgressLine(lambda: next(clock))
    for done in (1, 2, 4):
        line(done, 4)
    drawn = capsys.readouterr().err.split("\r")[1:]
    assert [text.rstrip(" ") for text in drawn] == [
        "computing tracks: 1 of 4 blocks, about 30 s left",
        "computing tracks: 2 of 4 blocks, about 20 s left",
        "computing tracks: 4 of 4 blocks".ljust(70) + "\n",
    ]
    assert len({len(text.rstrip("\n")) for text in drawn}) == 1  # what was longer is overwritten


@pytest.mark.parametrize(
    ("seconds", "words"),
    [(0.0, "1 s"), (40.4, "40 s"), (89.0, "89 s"), (91.0, "2 min"), (720.0, "12 min"), (11_000.0, "3 h")],
)
def test_times_left_are_rough(seconds: float, words: str) -> None:
    assert time_left(seconds) == words


def test_a_line_met_again_is_told_once() -> None:
    lines: list[str] = []
    tell = told_once(lines.append)
    for line in ("a", "b", "a", "b", "c"):
        tell(line)
    assert lines == ["a", "b", "c"]

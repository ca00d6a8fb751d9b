"""Where answers go: whole files or none, refused before the work where they cannot be written."""

from __future__ import annotations

import errno
import json
import os
from pathlib import Path
from types import SimpleNamespace

import pytest

from sunbot import writing
from sunbot.errors import InputError, UndeliveredError
from sunbot.report.delivery import Outputs, deliver
from sunbot.types import Caution
from sunbot.writing import write_text, write_whole

ANSWER = SimpleNamespace(cautions=(Caution("frost", "battery", "It is cold."),), to_dict=lambda: {"degC": "über null"})


def told(outputs, said):
    return deliver(
        ANSWER,
        outputs,
        text=lambda answer: "in words\n",
        csv=lambda answer, path: write_text(path, "time\n"),
        figure=lambda answer: pytest.fail("no plot was asked for"),
        notes=said.append,
    )


def test_text_is_the_answer_and_says_its_cautions_itself(tmp_path):
    """Without --json nothing goes to the notes and no file is written."""
    said = []
    assert told(Outputs(), said) == "in words\n"
    assert said == []
    assert not list(tmp_path.iterdir())


def test_json_is_one_document_and_the_cautions_go_to_the_notes():
    """Readable text, no escapes of letters, a line end at the end."""
    said = []
    printed = told(Outputs(as_json=True), said)
    assert json.loads(printed) == {"degC": "über null"}
    assert "über" in printed
    assert printed.endswith("}\n")
    assert said == ["battery: It is cold. [frost]"]


def test_files_are_written_beside_the_answer(tmp_path):
    """--csv adds a file to whatever is printed."""
    said = []
    assert told(Outputs(csv=tmp_path / "steps.csv"), said) == "in words\n"
    assert (tmp_path / "steps.csv").read_text() == "time\n"
    assert [path.name for path in tmp_path.iterdir()] == ["steps.csv"]


def test_what_cannot_be_written_is_refused_before_the_work(tmp_path):
    """A missing folder and an unknown picture format, both at once."""
    outputs = Outputs(csv=tmp_path / "no" / "steps.csv", plot=tmp_path / "answer.gif")
    with pytest.raises(InputError) as caught:
        outputs.ready()
    picture, folder = (str(fault) for fault in caught.value.faults)
    assert f"there is no folder {tmp_path / 'no'}" in folder
    assert "a name ending in .png, .svg or .pdf" in picture
    Outputs(csv=tmp_path / "steps.csv", plot=tmp_path / "ANSWER.PNG").ready()


def test_a_full_disk_leaves_the_old_file_and_no_half_one(tmp_path):
    """The write fails in the middle: the message says why, what stood there stands."""
    target = tmp_path / "steps.csv"
    target.write_text("of yesterday")

    def write(temporary: Path) -> None:
        temporary.write_text("half")
        raise OSError(errno.ENOSPC, "No space left on device")

    with pytest.raises(InputError, match=r"steps\.csv: cannot be written \(No space left on device\)"):
        write_whole(target, write)
    assert target.read_text() == "of yesterday"
    assert [path.name for path in tmp_path.iterdir()] == ["steps.csv"]


@pytest.mark.parametrize("stop", [KeyboardInterrupt, MemoryError, ValueError])
def test_any_stop_in_the_middle_leaves_no_half_file(tmp_path, stop):
    """An interrupt is not turned into a message, and no temporary file stays."""

    def write(temporary: Path) -> None:
        temporary.write_text("half")
        raise stop

    with pytest.raises(stop):
        write_whole(tmp_path / "steps.csv", write)
    assert not list(tmp_path.iterdir())


def test_a_folder_that_takes_no_file_is_told(tmp_path, monkeypatch):
    """No right to write: named with the reason."""

    def refuse(**_):
        raise PermissionError(errno.EACCES, "Permission denied")

    monkeypatch.setattr(writing.tempfile, "mkstemp", refuse)
    with pytest.raises(InputError, match=r"cannot be written \(Permission denied\)\. Write a path with room"):
        write_text(tmp_path / "steps.csv", "time\n")


def test_a_file_is_seen_only_when_it_is_complete(tmp_path):
    """While it is written the target does not exist; afterwards it has the rights of an ordinary file."""
    target = tmp_path / "steps.csv"
    seen = []

    def write(temporary: Path) -> None:
        temporary.write_text("whole")
        seen.append((temporary.parent, target.exists()))

    write_whole(target, write)
    assert seen == [(tmp_path, False)]
    plain = tmp_path / "plain"
    plain.touch()
    assert target.stat().st_mode == plain.stat().st_mode


@pytest.mark.parametrize("link", [False, True])
def test_no_file_of_the_question_is_overwritten(tmp_path, link):
    """What the question is read from is refused, by its own name or by another that leads there."""
    weather = tmp_path / "tower.csv"
    weather.write_text("time,ghi\n")
    name = tmp_path / "by-another-name.csv" if link else weather
    if link:
        name.symlink_to(weather)
    with pytest.raises(InputError, match=r"--csv .* is a file this question is read from"):
        Outputs(csv=name).ready([weather])
    Outputs(csv=tmp_path / "steps.csv").ready([weather])


def test_nothing_is_written_under_the_ending_of_a_robot_file(tmp_path):
    """A .toml is somebody's robot or site, also one that is not there yet."""
    with pytest.raises(InputError, match=r"has the ending of a robot or site file\. Write another name, e\.g\. robot2"):
        Outputs(csv=tmp_path / "robot2.toml").ready()


def test_one_file_cannot_take_two_outputs(tmp_path):
    """The plot would replace the table."""
    with pytest.raises(InputError, match="is the file of --csv too"):
        Outputs(csv=tmp_path / "a.png", plot=tmp_path / "a.png").ready()


def test_trying_a_path_leaves_no_trace_and_changes_nothing(tmp_path):
    """Neither a new file nor a touched one."""
    old = tmp_path / "old.csv"
    old.write_text("of yesterday")
    Outputs(csv=old, plot=tmp_path / "new.png").ready()
    assert [path.name for path in tmp_path.iterdir()] == ["old.csv"]
    assert old.read_text() == "of yesterday"


def test_a_folder_without_room_is_told_before_the_work(tmp_path, monkeypatch):
    """The path is tried, not only looked at."""

    def refuse(**_):
        raise OSError(errno.ENOSPC, "No space left on device")

    monkeypatch.setattr(writing.tempfile, "mkstemp", refuse)
    with pytest.raises(InputError, match=r"--csv .*steps\.csv: cannot be written \(No space left on device\)"):
        Outputs(csv=tmp_path / "steps.csv").ready()


def test_a_link_stays_a_link_and_its_file_is_replaced(tmp_path):
    """Also one that leads to a file that does not exist yet, and the rights of an old file stay."""
    target, link = tmp_path / "there.csv", tmp_path / "link.csv"
    link.symlink_to("there.csv")
    write_text(link, "first")
    target.chmod(0o640)
    write_text(link, "second")
    assert link.is_symlink()
    assert target.read_text() == "second"
    assert target.stat().st_mode & 0o777 == 0o640


def test_what_is_no_ordinary_file_is_left_as_it_is(tmp_path):
    """A pipe, as a device would be, is refused before the work and at its end, and is still a pipe."""
    pipe = tmp_path / "pipe.csv"
    os.mkfifo(pipe)
    for attempt in (lambda: Outputs(csv=pipe).ready(), lambda: write_text(pipe, "time\n")):
        with pytest.raises(InputError, match="is no ordinary file"):
            attempt()
    assert pipe.is_fifo()


def test_an_answer_is_not_lost_with_its_file(tmp_path):
    """Where the file cannot be written after the work, the error carries the answer."""
    with pytest.raises(UndeliveredError, match="there is no folder") as caught:
        told(Outputs(csv=tmp_path / "gone" / "steps.csv"), [])
    assert caught.value.answer == "in words\n"

"""Where answers go: whole files or none, refused before the work where they cannot be written."""

from __future__ import annotations

import errno
import json
from pathlib import Path
from types import SimpleNamespace

import pytest

from sunbot import writing
from sunbot.errors import InputError
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
    folder, picture = (str(fault) for fault in caught.value.faults)
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

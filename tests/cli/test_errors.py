"""Wrong calls: each is refused with its own words, the right status, and no traceback."""

from __future__ import annotations

import pytest

import acsolve as door
from tests.cli.runner import acsolve, circuit

LEVEL = circuit("level_float")
PAIRS = ("--from", "wiper", "--to", "out")

WRONG = [
    (("solve", LEVEL), "command.unknown"),
    (("transfr", LEVEL), "command.unknown"),
    (("transfer",), "option.value"),
    (("transfer", LEVEL, LEVEL), "option.value"),
    (("transfer", LEVEL, "--shape", "x"), "option.unknown"),
    (("transfer", LEVEL, "--form", "x"), "option.value"),
    (("transfer", LEVEL, "--from"), "option.value"),
    (("transfer", LEVEL, "--from", "wiper"), "option.value"),
    (("transfer", LEVEL, *PAIRS, "--through", "M1"), "option.value"),
    (("transfer", LEVEL, *PAIRS, "--quantity", "power"), "option.value"),
    (("sweep", LEVEL, *PAIRS, "--into", "out"), "option.value"),
    (("sweep", LEVEL, "--at", "1Hz", "--band", "1Hz..2Hz"), "option.value"),
    (("transfer", LEVEL, "--from", "nowhere", "--to", "out"), "name.unknown-node"),
    (("transfer", LEVEL, "--from", "wiper", "--to", "wiper,wiper"), "question.same-node"),
    (("transfer", LEVEL, "--from", "wiper", "--through", "M9"), "question.unknown-name"),
    (("transfer", LEVEL, "--variant", "none such"), "variant.unknown"),
    (("transfer", LEVEL, "--let", "R1"), "option.value"),
    (("transfer", LEVEL, "--let", "R9=1k"), "question.unknown-name"),
    (("transfer", LEVEL, "--let", "R1=1nF"), "value.unit"),
    (("transfer", LEVEL, "--keep", "R9"), "option.value"),
    (("transfer", LEVEL, "--budget", "many"), "option.value"),
    (("impedance", LEVEL), "question.no-pair"),
    (("cutoff", circuit("five_sections")), "question.no-pair"),
    (("cutoff", LEVEL, "--level", "6"), "value.level"),
    (("sweep", LEVEL, "--band", "1MHz..1Hz"), "value.band"),
    (("sweep", LEVEL, "--points", "some"), "sweep.points"),
    (("sweep", LEVEL, "--points", "1"), "sweep.points"),
    (("sweep", LEVEL, "--save", "table.doc"), "save.ending"),
    (("transfer", LEVEL, "--save", "table.csv"), "save.ending"),
    (("sweep", LEVEL, "--save", "no/such/folder/table.csv"), "save.failed"),
]
UNANSWERED = [
    (("cutoff", LEVEL, "--reference", "infinity"), "question.no-reference"),
    (("cutoff", circuit("five_sections"), "--from", "src", "--to", "out"), "question.no-value"),
    (("sweep", circuit("five_sections"), "--from", "src", "--to", "out"), "question.no-value"),
    (
        ("cutoff", circuit("mast_cable"), "--from", "send", "--to", "far_end", "--symbolic"),
        "equations.not-rational",
    ),
]


@pytest.mark.parametrize(
    ("arguments", "code", "status"),
    [(*case, 2) for case in WRONG] + [(*case, 1) for case in UNANSWERED],
    ids=lambda value: None if not isinstance(value, tuple) else " ".join(map(str, value))[-60:],
)
def test_refused(arguments, code, status):
    """A wrong call has status 2, an unanswerable question 1; the reason is on standard error."""
    found = acsolve(*arguments)
    assert found.status == status
    assert found.out == ""
    assert code in found.err
    assert "Traceback" not in found.err


@pytest.mark.parametrize(("arguments", "code"), WRONG + UNANSWERED)
def test_refused_in_json(arguments, code):
    """With --json the reason is a document on standard output, and only there."""
    found = acsolve(*arguments, "--json")
    if arguments[-1] == "--from":
        return
    assert found.err == ""
    assert found.document["format"] == 1
    assert "answers" not in found.document
    keys = {"code", "message", "file", "line", "column", "hint"}
    assert all(set(item) >= keys for item in found.document["errors"])
    assert code in [item["code"] for item in found.document["errors"]]


def test_an_option_is_named_as_the_place():
    """A value that does not read is marked under the name of its option, which is no file."""
    arguments = ("sweep", LEVEL, "--band", "1MHz..1Hz")
    assert "--band, line 1, column 1" in acsolve(*arguments).err
    (error,) = acsolve(*arguments, "--json").document["errors"]
    assert (error["file"], error["line"], error["where"]) == (None, None, "--band")


def test_unanswerable_question_marks_its_line():
    """A question of the file that has no answer is shown with its line."""
    found = acsolve("cutoff", LEVEL, "--reference", "infinity")
    assert "line 14" in found.err
    assert "ask cutoff" in found.err


def test_answered_questions_are_shown_beside_the_one_that_fails(tmp_path):
    """One question without an answer does not hide the answers of the others."""
    file = tmp_path / "two.circuit"
    file.write_text(
        "in -- R1 = 1k -- out -- C1 = 1n -- gnd\nin -- L1 = 1m -- gnd\n"
        "ask cutoff from in to out\nask cutoff into in\nask transfer from in to out\n"
    )
    file.write_text(file.read_text().replace("ask cutoff into in\n", ""))
    found = acsolve("cutoff", file)
    assert found.status == 0
    file.write_text(file.read_text() + "lone -- C2 = 1n -- far\nask cutoff from in to far\n")
    found = acsolve("cutoff", file)
    assert found.status == 1
    assert "159.155 kHz" in found.out
    assert "ask cutoff from in to far" in found.err


def test_check_of_a_network_that_makes_no_sense(tmp_path):
    """`check` answers with every problem, and its status says the file is wrong."""
    file = tmp_path / "loop.circuit"
    file.write_text(
        "gnd -- V1 : voltage_source(amplitude = 1 V) -- a\n"
        "gnd -- V2 : voltage_source(amplitude = 2 V) -- a\na -- R1 = 1k -- gnd\n"
    )
    found = acsolve("check", file)
    assert found.status == 2
    assert "graph.voltage-loop" in found.out
    document = acsolve("check", file, "--json").document
    assert document["answers"][0]["ok"] is False
    assert document["errors"][0]["code"] == "graph.voltage-loop"


def test_a_zero_answer_says_why(tmp_path):
    """An answer that is zero for want of a connection comes with that warning."""
    file = tmp_path / "apart.circuit"
    file.write_text("a -- R1 = 1k -- gnd\nb -- R2 = 1k -- gnd\n")
    found = acsolve("transfer", file, "--from", "a", "--to", "b")
    assert found.status == 0
    assert "graph.unreachable" in found.err


def test_defect_is_one_line(monkeypatch):
    """An error of ours is one line that asks for a report, with a status of its own."""

    def broken(*_: object, **__: object) -> None:
        raise RuntimeError("a slip\nof ours")

    monkeypatch.delenv("ACSOLVE_DEBUG", raising=False)
    monkeypatch.setattr(door.Path, "transfer", broken)
    found = acsolve("transfer", LEVEL)
    assert found.status == 70
    assert found.err.count("\n") == 1
    assert "RuntimeError: a slip of ours" in found.err
    monkeypatch.setenv("ACSOLVE_DEBUG", "1")
    with pytest.raises(RuntimeError, match="a slip"):
        acsolve("transfer", LEVEL)


def test_interrupt_is_one_line(monkeypatch):
    """Ctrl-C ends with one line and status 130."""

    def stopped(*_: object, **__: object) -> None:
        raise KeyboardInterrupt

    monkeypatch.setattr(door.Path, "transfer", stopped)
    found = acsolve("transfer", LEVEL)
    assert (found.status, found.err) == (130, "acsolve: stopped\n")

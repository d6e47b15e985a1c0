"""Joint logs broken in the ways of other people's firmware: each is refused with its place, or repaired and counted."""

from __future__ import annotations

import gzip
import io
from collections.abc import Callable
from pathlib import Path
from tempfile import TemporaryDirectory

import numpy as np
import pytest
from hypothesis import HealthCheck, example, given, settings
from hypothesis import strategies as st

from armeval.errors import Finding, Findings, InputError
from armeval.files.joint_logs.log_file import read_joint_log, write_joint_log
from armeval.model.arm import Arm
from armeval.model.joint_log import JointLog
from tests.files.findings import faults
from tests.files.log_text import HEADER, log_lines, log_text, motion

LINES = log_lines(60)
BODY = "\n".join(LINES[1:])


def with_line(number: int, line: str) -> str:
    """Give the sound log with another line in the place of one (the header is line 1)."""
    return "\n".join([*LINES[: number - 1], line, *LINES[number:]])


def with_cell(number: int, column: int, cell: str) -> str:
    cells = LINES[number - 1].split(",")
    cells[column] = cell
    return with_line(number, ",".join(cells))


def with_header(header: str) -> str:
    return f"{header}\n{BODY}"


def every_line(change: Callable[[str], str]) -> str:
    return "\n".join([LINES[0], *(change(line) for line in LINES[1:])])


LIFT = "lift.angle [deg]"
REFUSED = [
    ("empty", "", "", "the file is empty", "header row"),
    ("blank", "\n\n \n", "", "the file is empty", "header row"),
    ("comments only", "# logged by nobody\n# nothing came\n", "", "the file is empty", "header row"),
    ("header only", LINES[0] + "\n", "", "a header and no row", "add rows"),
    ("header and comments", LINES[0] + "\n# switched off\n", "", "a header and no row", "add rows"),
    ("one row", "\n".join(LINES[:2]), "row 2", "one row", "whole lap"),
    ("no header", BODY, "row 1", "numbers, not a header", "put a header row"),
    ("parted by spaces", log_text().replace(",", " "), "row 1", "one column only", "comma, semicolon or tab"),
    ("parted by bars", log_text().replace(",", "|"), "row 1", "one column only", "comma, semicolon or tab"),
    ("text", with_cell(9, 2, "fault"), f"row 9, column `{LIFT}`", "`fault` is not a number", "give a number"),
    ("NaN", with_cell(9, 2, "NaN"), f"row 9, column `{LIFT}`", "`NaN` is not a finite number", "remove the row"),
    ("minus nan", with_cell(9, 2, "-nan"), f"row 9, column `{LIFT}`", "`-nan` is not a finite", "remove the row"),
    ("nan(ind)", with_cell(9, 2, "-nan(ind)"), f"row 9, column `{LIFT}`", "is not a number", "give a number"),
    ("infinity", with_cell(9, 2, "-Infinity"), f"row 9, column `{LIFT}`", "is not a finite number", "remove the row"),
    ("overflow", with_cell(9, 2, "1e400"), f"row 9, column `{LIFT}`", "is not a finite number", "remove the row"),
    ("garbage number", with_cell(9, 2, "-3.2e38"), f"row 9, column `{LIFT}`", "beyond anything", "the unit"),
    ("empty cell", with_cell(9, 2, ""), f"row 9, column `{LIFT}`", "the cell is empty", "remove the row"),
    ("hexadecimal", with_cell(9, 2, "0x1F"), f"row 9, column `{LIFT}`", "`0x1F` is not a number", "give a number"),
    ("half a number", with_cell(9, 2, "1.2e"), f"row 9, column `{LIFT}`", "`1.2e` is not a number", "give a number"),
    ("two points", with_cell(9, 2, "1.2.3"), f"row 9, column `{LIFT}`", "`1.2.3`", "decimal mark only"),
    ("thousands", with_cell(9, 2, '"1,234.5"'), f"row 9, column `{LIFT}`", "between its thousands", "decimal mark"),
    ("unit in the cell", with_cell(9, 2, "12 deg"), f"row 9, column `{LIFT}`", "`12 deg` is not a number", "number"),
    ("time of day", with_cell(9, 0, "12:30:01"), "row 9, column `time [s]`", "`12:30:01` is not a number", "number"),
    ("boolean", with_cell(9, 1, "true"), "row 9, column `turn.angle [rad]`", "`true` is not a number", "number"),
    ("open quote", with_cell(9, 1, '"0.5'), "row 9", "a quote is opened and not closed", "close it"),
    ("cut off", log_text()[:-30], "row 61", "where the header has 4", "may have been cut off"),
    ("short row", with_line(9, "0.07,1.0"), "row 9", "2 cells where the header has 4", "every column a cell"),
    ("long row", with_line(9, LINES[8] + ",1,2"), "row 9", "6 cells where the header has 4", "remove the cells"),
    ("trailing commas", every_line(lambda line: line + ","), "row 2", "5 cells where the header has 4", "remove"),
    ("two rows in one", with_line(9, LINES[8] + LINES[9]), "row 9", "7 cells where the header has 4", "remove"),
    ("two logs in one", "\n".join([*LINES, *LINES]), "row 62", "the header stands here again", "split the file"),
    ("message of the logger", with_line(9, "buffer overrun!"), "row 9", "1 cell where the header has 4", "cut off"),
    (
        "decimal commas",
        f"{HEADER}\n{BODY.replace('.', ',')}",
        "row 2",
        "8 cells where the header has 4",
        "semicolon or tab",
    ),
    (
        "time stands still",
        every_line(lambda line: "0.5," + line.split(",", 1)[1]),
        "row 3",
        "time stands still",
        "digits",
    ),
    ("coarse time", every_line(lambda line: line[:3] + "," + line.split(",", 1)[1]), "row 3", "stands still", "digits"),
    ("time runs back", "\n".join([LINES[0], *LINES[:0:-1]]), "row 3", "time runs back by 10.0 ms", "`lap` column"),
    ("clock reset", "\n".join([*LINES, *LINES[1:]]), "row 62", "time runs back by 590 ms", "`lap` column"),
    ("clock set forward by mistake", with_cell(30, 0, "1e9"), "row 31", "time runs back", "split the file"),
    ("no time", with_header(HEADER.replace("time [s]", "t [s]")), "header", "no column `time`", "[columns]"),
    (
        "no unit",
        with_header(HEADER.replace(" [deg]", "")),
        "column `lift.angle`",
        "it has no unit",
        "`lift.angle [rad]`",
    ),
    (
        "unit of another kind",
        with_header(HEADER.replace("deg", "s")),
        "column `lift.angle [s]`",
        "`s` does not",
        "`rad`",
    ),
    ("unknown unit", with_header(HEADER.replace("deg", "degs/")), "column `lift.angle [degs/]`", "not a unit", "write"),
    ("empty unit", with_header(HEADER.replace("deg", "")), "column `lift.angle []`", "not", "`"),
    (
        "length for a turning joint",
        with_header(HEADER.replace("deg", "mm")),
        "column `lift.angle [mm]`",
        "`mm`",
        "`rad`",
    ),
    (
        "angle for a sliding joint",
        with_header(HEADER.replace("mm", "deg")),
        "column `reach.angle [deg]`",
        "`deg`",
        "`m`",
    ),
    ("mistyped joint", with_header(HEADER.replace("lift", "lfit")), "header", "no column `lift.angle`", "`lfit.angle`"),
    (
        "mistyped quantity",
        with_header(HEADER.replace("lift.angle", "lift.angel")),
        "header",
        "`lift.angle`",
        "`lift.angel`",
    ),
    (
        "column twice",
        with_header(HEADER.replace("reach.angle [mm]", "lift.angle [rad]")),
        "header",
        "2 columns",
        "keep one",
    ),
    (
        "broken bracket",
        with_header(HEADER.replace("deg]", "deg")),
        "header",
        "no column `lift.angle`",
        "did you mean `lift.angle [deg`?",
    ),
    (
        "lap of a half",
        every_line(lambda line: line + ",1.5").replace("[mm]", "[mm],lap"),
        "row 2",
        "lap is 1.5",
        "whole",
    ),
    ("UTF-16", log_text().encode("utf-16"), "byte 1", "UTF-16", "UTF-8"),
    ("Latin-1", with_cell(9, 2, "12\u00b0").encode("latin-1"), "row 9, byte", "0xb0 is not UTF-8", "UTF-8"),
    ("zeros of a lost disk block", log_text().encode() + b"\0" * 512, "row 62, byte", "no text", "UTF-8"),
    ("control-Z", log_text().encode() + b"\x1a", "row 62", "1 cell where the header has 4", "cut off"),
    ("packed and cut off", gzip.compress(log_text().encode())[:-40], "", "cannot be read to its end", "again"),
    (
        "packed and damaged",
        gzip.compress(log_text().encode())[:60] + b"?" * 99,
        "",
        "cannot be read to its end",
        "again",
    ),
    ("cut-off Parquet", b"PAR1" + b"\0" * 40, "", "Parquet file cannot be read", "again"),
]


@pytest.mark.parametrize(
    ("content", "place", "what", "mend"), [case[1:] for case in REFUSED], ids=[c[0] for c in REFUSED]
)
def test_a_log_that_cannot_be_used_is_refused_with_its_place(
    tmp_path: Path, gantry: Arm, content: str | bytes, place: str, what: str, mend: str
) -> None:
    file = tmp_path / "l.csv"
    file.write_bytes(content if isinstance(content, bytes) else content.encode())
    fault = faults(lambda: read_joint_log(file, gantry, findings=Findings()))[0]
    assert fault.file == str(file)
    assert fault.place.startswith(place)
    assert bool(fault.place) == bool(place)
    assert what in fault.what
    assert mend in fault.mend


REPAIRED = [
    ("byte order mark", "\ufeff" + log_text(), []),
    ("CRLF", log_text().replace("\n", "\r\n"), []),
    ("CR", log_text().replace("\n", "\r"), []),
    ("semicolons and decimal commas", f"{HEADER}\n{BODY.replace('.', '!')}".replace(",", ";").replace("!", ","), []),
    ("tabs", log_text().replace(",", "\t"), []),
    ("spaces after commas", log_text().replace(",", ", "), []),
    ("quoted headers", log_text().replace(HEADER, ",".join(f'"{name}"' for name in HEADER.split(","))), []),
    ("every cell quoted", "\n".join('"' + '","'.join(line.split(",")) + '"' for line in LINES), []),
    ("plus signs", every_line(lambda line: "+" + line), []),
    ("no last line end", log_text().rstrip("\n"), []),
    ("blank lines", log_text().replace("\n", "\n\n"), []),
    ("comments", log_text().replace("\n", "\n# ,,, comment\n"), []),
    ("a header in a comment", "# " + log_text(), []),
    ("a trailing comma in every line", "\n".join(line + "," for line in LINES), []),
    ("text in a column that is not read", every_line(lambda line: line + ",run").replace("[mm]", "[mm],mode"), []),
    ("twice", "\n".join([*LINES[:20], LINES[19], *LINES[20:]]), ["row 21: 1 sample came twice: removed"]),
    (
        "all twice",
        "\n".join([LINES[0], *(line for line in LINES[1:] for _ in (0, 1))]),
        ["60 samples came twice: removed"],
    ),
    (
        "late",
        "\n".join([*LINES[:20], LINES[21], LINES[20], *LINES[22:]]),
        ["row 22: 1 sample came late, by up to 10.0 ms"],
    ),
    (
        "same time",
        with_line(20, LINES[19] + "\n" + LINES[19].split(",")[0] + ",0,0,0"),
        ["row 21: 1 sample had the time"],
    ),
]


@pytest.mark.parametrize(("content", "told"), [case[1:] for case in REPAIRED], ids=[case[0] for case in REPAIRED])
def test_a_log_that_can_be_repaired_gives_the_same_numbers(
    tmp_path: Path, gantry: Arm, content: str, told: list[str]
) -> None:
    file = tmp_path / "l.csv"
    file.write_text(content, newline="")
    heard = Findings()
    (log,) = read_joint_log(file, gantry, findings=heard)
    time, angle = motion(60)
    np.testing.assert_allclose(log.time, time, rtol=1e-15)
    np.testing.assert_allclose(log.angle, angle, rtol=1e-14)
    assert len(heard.found) == len(told)
    for finding, part in zip(heard.found, told, strict=True):
        assert part in str(finding)


def test_all_faults_of_a_log_are_told_at_once(tmp_path: Path, gantry: Arm) -> None:
    file = tmp_path / "l.csv"
    file.write_text(with_cell(9, 2, "x") + "\n1,2\n3,4,nan,5\n")
    found = faults(lambda: read_joint_log(file, gantry))
    assert [fault.place for fault in found] == [f"row 9, column `{LIFT}`", "row 62", f"row 63, column `{LIFT}`"]


def parquet_bytes() -> bytes:
    time, angle = motion(60)
    with TemporaryDirectory() as folder:
        file = Path(folder) / "l.parquet"
        write_joint_log(JointLog(time, angle), file, ("turn", "lift", "reach"), (False, False, True))
        return file.read_bytes()


def check_whatever_happens(content: bytes, arm: Arm) -> None:
    """Read bytes as a log: either finite laps in the order of time, or a finding with a mend."""
    with TemporaryDirectory() as folder:
        file = Path(folder) / "l.csv"
        file.write_bytes(content)
        heard = Findings()
        refused: tuple[Finding, ...] = ()
        try:
            laps = read_joint_log(file, arm, findings=heard)
        except InputError as fault:
            laps, refused = (), fault.findings
    assert bool(laps) != any(finding.level == "error" for finding in refused)
    assert all(finding.file == str(file) and finding.what for finding in (*refused, *heard.found))
    for log in laps:
        assert len(log.time) >= 2
        assert (np.diff(log.time) > 0.0).all()
        for values in (log.time, log.angle, log.target, log.torque):
            assert values is None or np.isfinite(values).all()


SOUND = st.sampled_from(
    [
        log_text(30).encode(),
        log_text(30).replace(",", ";").encode(),
        with_header(HEADER + ",lap").replace("\n0", ",1\n0").encode(),
        b"time [us],turn.angle [count],lift.angle [count],reach.angle [count],turn.target [rad],lift.target [rad],"
        b"reach.target [m],turn.current [A],lift.current [A],reach.torque [N]\n"
        + b"\n".join(b"%d,%d,%d,%d,1,%d,2,3,4,5" % (i, 3 * i, -i, i % 7, i) for i in range(40)),
        gzip.compress(log_text(30).encode()),
        parquet_bytes(),
    ]
)
JUNK = st.one_of(
    st.binary(max_size=8),
    st.sampled_from(b'\n|\r|,|;|\t|"|#|nan|inf|1e308|-1e308|1e-320|\xff|\0|[|]|65536|4294967296'.split(b"|")),
    st.sampled_from(b"\n# c\n|,,|0,0,0,0\n|\x1f\x8b|PAR1|\xef\xbb\xbf|\x89MCAP0\r\n|SQLite f".split(b"|")),
)


@st.composite
def damaged(draw: st.DrawFn) -> bytes:
    """Bytes of a sound log with some of them replaced, removed, doubled or moved."""
    content = draw(SOUND)
    for _ in range(draw(st.integers(1, 4))):
        first, last = sorted((draw(st.integers(0, len(content))), draw(st.integers(0, len(content)))))
        last = min(last, first + draw(st.sampled_from([0, 1, 4, 40, 400])))
        content = content[:first] + draw(st.one_of(JUNK, st.just(content[first:last] * 2))) + content[last:]
    return content


FUZZ = settings(
    max_examples=300,
    deadline=None,
    derandomize=True,
    suppress_health_check=[HealthCheck.function_scoped_fixture, HealthCheck.too_slow, HealthCheck.data_too_large],
)


@FUZZ
@given(content=damaged())
def test_a_damaged_log_is_read_or_refused(gantry: Arm, content: bytes) -> None:
    check_whatever_happens(content, gantry)


@FUZZ
@given(content=st.one_of(st.binary(max_size=300), st.text(max_size=300).map(str.encode)))
@example(content=b"\xef\xbb\xbf")
@example(content=b"\x1f\x8b")
@example(content=b"PAR1")
def test_any_bytes_are_read_or_refused(gantry: Arm, content: bytes) -> None:
    check_whatever_happens(content, gantry)


@FUZZ
@given(
    rows=st.lists(
        st.tuples(*[st.floats(width=64) | st.integers(-(2**40), 2**40) | st.sampled_from([0.0, 1e-3])] * 4), max_size=30
    )
)
def test_any_numbers_are_read_or_refused(gantry: Arm, rows: list[tuple[float, ...]]) -> None:
    text = io.StringIO()
    text.write(HEADER + "\n")
    text.writelines(",".join(map(repr, row)) + "\n" for row in rows)
    check_whatever_happens(text.getvalue().encode(), gantry)

from __future__ import annotations

import gzip
import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest

from armeval.files.tables import lines
from armeval.files.tables.scaled import Scaled
from armeval.files.tables.table import open_table
from tests.files.findings import faults, only_fault

BOTH = [[Scaled(0), Scaled(1)]]
ROWS = [[0.0, 1.5], [0.25, -2e-3], [1e3, 40.0]]


def numbers(path: Path, content: str | bytes) -> list[list[float]]:
    path.write_bytes(content if isinstance(content, bytes) else content.encode())
    return open_table(path).read(BOTH)[0].tolist()


@pytest.mark.parametrize(
    "content",
    [
        "time [s],q [deg]\n0,1.5\n0.25,-2e-3\n1000,40\n",
        "time [s];q [deg]\n0;1.5\n0.25;-2E-3\n1e3;40.0\n",
        "time [s]\tq [deg]\n0\t1.5\n0.25\t-2e-3\n1000\t40\n",
        "time [s];q [deg]\n0;1,5\n0,25;-2e-3\n1000;40\n",
        "time [s]\tq [deg]\n0\t1,5\n,25\t-0,002\n1000\t40,\n",
        '"time [s]","q [deg]"\n"0","1,5"\n"0,25","-0,002"\n"1000","40"\n',
        "\ufefftime [s],q [deg]\n0,1.5\n0.25,-2e-3\n1000,40\n",
        "time [s],q [deg]\r\n0,1.5\r\n0.25,-2e-3\r\n1000,40\r\n",
        "time [s],q [deg]\r0,1.5\r0.25,-2e-3\r1000,40\r",
        "# made up, by nobody\n\n# second line\ntime [s],q [deg]\n0,1.5\n0.25,-2e-3\n1000,40",
        "time [s],q [deg]\n\n0,1.5\n# a pause\n# a pause, and more\n0.25,-2e-3\n   \n1000,40\n\n",
        "# time [s],q [deg]\n0,1.5\n0.25,-2e-3\n1000,40\n",
        " time [s] , q [deg] \n 0 ,  1.5\n+0.25,\t-2e-3\n1000, 40 \n",
        "sep=;\ntime [s];q [deg]\n0;1.5\n0.25;-2e-3\n1000;40\n",
        "\ufeff# n\u00e4chste Probe\r\ntime [s];q [deg]\r\n0;1,5\r\n#;\r\n0,25;-0,002\r\n1000;40\r\n",
    ],
    ids=[
        "comma",
        "semicolon",
        "tab",
        "decimal comma and semicolon",
        "decimal comma and tab",
        "decimal comma in quotes",
        "byte order mark",
        "CRLF",
        "CR",
        "comments above",
        "comments and blank lines between",
        "header as a comment",
        "spaces",
        "separator line",
        "all at once",
    ],
)
def test_one_table_written_in_many_ways_reads_the_same(tmp_path: Path, content: str) -> None:
    assert numbers(tmp_path / "t.csv", content) == ROWS
    assert numbers(tmp_path / "t.csv.gz", gzip.compress(content.encode())) == ROWS
    assert numbers(tmp_path / "packed.csv", gzip.compress(content.encode())) == ROWS


def test_header_cells_have_names_and_units(tmp_path: Path) -> None:
    file = tmp_path / "t.csv"
    file.write_text('time [ms],"a, b [N*m]",lap\n1,2,3\n')
    table = open_table(file)
    assert [(column.name, column.unit) for column in table.columns] == [("time", "ms"), ("a, b", "N*m"), ("lap", None)]


def test_factors_are_applied_and_columns_chosen(tmp_path: Path) -> None:
    file = tmp_path / "t.csv"
    file.write_text("time [ms],note,q [deg]\n1,started,180\n2,,90\n")
    first, second = open_table(file).read([[Scaled(2, np.pi / 180.0), Scaled(0, 1e-3)], [Scaled(0)]])
    np.testing.assert_allclose(first, [[np.pi, 1e-3], [np.pi / 2.0, 2e-3]], rtol=1e-15)
    assert second.tolist() == [[1.0], [2.0]]


def test_decimals_that_come_late_are_still_understood(tmp_path: Path) -> None:
    whole = "\n".join(f"{i};{i}" for i in range(60_000))
    values = numbers(tmp_path / "t.csv", f"time [s];q [deg]\n{whole}\n60000;0,5\n")
    assert len(values) == 60_001
    assert values[-1] == [60_000.0, 0.5]


def test_a_comment_is_no_row_even_where_nobody_reads_its_column(tmp_path: Path) -> None:
    file = tmp_path / "t.csv"
    file.write_text("note,time [s],q [deg]\nok,0,1\n# 7,8,9\nok,2,3\n")
    assert open_table(file).read([[Scaled(1), Scaled(2)]])[0].tolist() == [[0.0, 1.0], [2.0, 3.0]]


@pytest.mark.parametrize("end", ["\n", "\r\n", "\r"])
@pytest.mark.parametrize("block", [7, 16, 64, 1000])
def test_where_blocks_are_cut_makes_no_difference(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, end: str, block: int
) -> None:
    rows = [[float(i), i / 8.0] for i in range(200)]
    text = end.join(["time [s],q [deg]", *(f"{a!r},{b!r}" for a, b in rows), "# end", ""])
    monkeypatch.setattr(lines, "BLOCK", block)
    assert numbers(tmp_path / "t.csv", text) == rows


def test_every_fault_is_told_with_row_and_column(tmp_path: Path) -> None:
    content = (
        "# a comment counts as a row\ntime [s],q [deg]\n0,1\n1,fast\n2,NaN\n3\n4,5,6\n5,\ninf,1\n6,1e999\n7,0x10\n"
        '8,1_0\n9,"10\ntime [s],q [deg]\n10,1e200\n'
    )
    told = {(fault.place, fault.what) for fault in faults(lambda: numbers(tmp_path / "t.csv", content))}
    assert told == {
        ("row 4, column `q [deg]`", "`fast` is not a number"),
        ("row 5, column `q [deg]`", "`NaN` is not a finite number"),
        ("row 6", "1 cell where the header has 2"),
        ("row 7", "3 cells where the header has 2"),
        ("row 8, column `q [deg]`", "the cell is empty"),
        ("row 9, column `time [s]`", "`inf` is not a finite number"),
        ("row 10, column `q [deg]`", "`1e999` is not a finite number"),
        ("row 11, column `q [deg]`", "`0x10` is not a number"),
        ("row 12, column `q [deg]`", "`1_0` is not a number"),
        ("row 13", "a quote is opened and not closed"),
        ("row 14", "the header stands here again"),
        ("row 15, column `q [deg]`", "`1e200` is beyond anything an arm does"),
    }


def test_a_thousand_faults_are_twenty_and_a_number(tmp_path: Path) -> None:
    content = "time [s],q [deg]\n" + "1,x\n" * 1234
    found = faults(lambda: numbers(tmp_path / "t.csv", content))
    assert len(found) == 21
    assert found[0].place == "row 2, column `q [deg]`"
    assert found[-1].what == "and 1,214 more rows with faults"


@pytest.mark.parametrize(
    ("content", "what", "mend"),
    [
        ("time [s];q [deg]\n0;1,5\n1;2.5\n2;3,5\n", "has a decimal point where the other rows have a comma", "alike"),
        ("time [s];q [deg]\n0;1.5\n1;2,5\n2;3.5\n", "has a decimal comma where the other rows have a point", "alike"),
        ("time [s];q [deg]\n0;1.5\n1;1,234.5\n2;3.5\n", "has marks between its thousands", "decimal mark only"),
        ("time [s],q [deg]\n0,1,2,5\n0,2,2,6\n", "4 cells where the header has 2", "by semicolon or tab"),
    ],
)
def test_decimal_marks_that_contradict_each_other_are_no_numbers(
    tmp_path: Path, content: str, what: str, mend: str
) -> None:
    fault = faults(lambda: numbers(tmp_path / "t.csv", content))[0]
    assert what in fault.what
    assert mend in fault.mend


@pytest.mark.parametrize(
    ("content", "what", "place"),
    [
        (b"", "the file is empty", ""),
        (b"\n\n# nothing\n", "the file is empty", ""),
        (b"time [s],q [deg]\n", "a header and no row", ""),
        (b"time [s],q [deg]", "a header and no row", ""),
        (b"0,1\n1,2\n", "numbers, not a header", "row 1"),
        (b"0,5;1,5\n1;2\n", "numbers, not a header", "row 1"),
        (b"time q\n0 1\n1 2\n", "one column only", "row 1"),
        (b'"time [s],q [deg]\n0,1\n', "cannot be read", "row 1"),
        ("time [s],q [deg]\n0,1\n".encode("utf-16"), "UTF-16", "byte 1"),
        (b"time [s],q [deg]\n0,1\n\0\0\0\0", "no text", "row 3, byte 22"),
        (b"time [s],q [\xb0]\n0,1\n", "byte 0xb0 is not UTF-8", "row 1, byte 13"),
        (b"time [s],q [deg]\n0,1\n# \xe4\n2,\xe4\n", "byte 0xe4 is not UTF-8", "row 3, byte 24"),
    ],
)
def test_a_file_that_is_no_table_is_refused(tmp_path: Path, content: bytes, what: str, place: str) -> None:
    fault = only_fault(lambda: numbers(tmp_path / "t.csv", content))
    assert what in fault.what
    assert fault.place == place
    assert fault.mend


def test_a_packed_file_that_was_cut_off_is_refused(tmp_path: Path) -> None:
    packed = gzip.compress(b"time [s],q [deg]\n" + b"0.125,1.25\n" * 1000)
    assert "cannot be read to its end" in only_fault(lambda: numbers(tmp_path / "t.csv.gz", packed[:-20])).what


def test_bad_text_far_into_a_long_file_is_placed(tmp_path: Path) -> None:
    content = b"time [s],q [deg]\n" + b"0.125,1.25\n" * 100_000 + b"1,\xff\n"
    fault = only_fault(lambda: numbers(tmp_path / "t.csv", content))
    assert fault.place == f"row 100002, byte {len(content) - 1}"


def test_a_missing_file_names_one_that_is_near(tmp_path: Path) -> None:
    (tmp_path / "bare-1.csv").write_text("")
    fault = only_fault(lambda: open_table(tmp_path / "bare_1.csv"))
    assert "there is no such file" in fault.what
    assert "did you mean `bare-1.csv`?" in fault.mend


def test_a_directory_is_no_table(tmp_path: Path) -> None:
    assert "is a directory" in only_fault(lambda: open_table(tmp_path)).what


def test_a_forbidden_file_is_told(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    file = tmp_path / "t.csv"
    file.write_text("time [s],q [deg]\n0,1\n")

    def forbid(*_: object, **__: object) -> None:
        raise PermissionError(13, "Permission denied")

    monkeypatch.setattr(Path, "open", forbid)
    fault = only_fault(lambda: open_table(file))
    assert "may not be read" in fault.what
    assert "permission" in fault.mend


def test_places_are_rows_of_the_file(tmp_path: Path) -> None:
    file = tmp_path / "t.csv"
    file.write_text("# comment\ntime [s],q [deg]\n0,1\n\n1,2\n# pause\n2,3\n")
    assert open_table(file).places([2, 0, 1]) == ["row 7", "row 3", "row 5"]


def test_reading_a_table_imports_no_pandas(tmp_path: Path) -> None:
    file = tmp_path / "p.csv"
    file.write_text("x [mm],y [mm],z [mm]\n0,0,0\n1,1,1\n")
    script = (
        "import sys; from armeval.files.path_file import read_path, write_path; "
        f"write_path(read_path({str(file)!r}, [], []), {str(tmp_path / 'q.csv')!r}); "
        "assert not {'pandas', 'matplotlib', 'numba'} & sys.modules.keys()"
    )
    subprocess.run([sys.executable, "-c", script], check=True)

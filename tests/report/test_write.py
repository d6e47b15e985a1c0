"""What a report writes: all of it or nothing, the same for the same files, and never over somebody's files."""

from __future__ import annotations

import hashlib
import json
import re
import shutil
import subprocess
from dataclasses import replace
from datetime import UTC, datetime
from pathlib import Path

import pandas as pd
import pytest

from armeval.errors import InputError
from armeval.report import write_report
from armeval.report.answers import Answers
from armeval.report.write import write_answers
from tests.report.conftest import WRITTEN
from tests.report.small_trial import small_trial


def _files(folder: Path) -> dict[str, bytes]:
    return {str(file.relative_to(folder)): file.read_bytes() for file in sorted(folder.rglob("*")) if file.is_file()}


def test_page_results_tables_and_figures_lie_beside_each_other(report: Path) -> None:
    names = set(_files(report))
    assert {"report.html", "report.md", "results.json"} <= names
    assert {
        f"tables/{name}.csv" for name in ("measured", "predicted", "laps", "regions", "events", "stretches")
    } <= names
    drawn = {Path(name).stem for name in names if name.startswith("figures/")}
    assert {"path", "along", "joints", "cog-maps", "orders", "event", "budget"} <= drawn
    assert {name for name in names if name.startswith("figures/")} == {
        f"figures/{stem}.{kind}" for stem in drawn for kind in ("svg", "png")
    }


def test_the_document_has_the_keys_that_scripts_rely_on(report: Path) -> None:
    document = json.loads((report / "results.json").read_text(encoding="utf-8"))
    assert document["schema"] == "armeval/report/1"
    assert {"armeval", "trial", "warnings", "predict", "measure", "locate", "comparison"} <= document.keys()
    assert [document[name]["schema"] for name in ("predict", "measure", "locate")] == [
        "armeval/predict/1",
        "armeval/measure/1",
        "armeval/locate/1",
    ]
    kinds = ("tracking_reduction", "deviation_reduction")
    wanted = {"before", "after", "regions_before", "regions_after", *kinds}
    wanted |= {f"{kind}_{end}" for kind in kinds for end in ("low", "high")}
    assert wanted <= document["comparison"].keys()


def test_the_page_and_the_document_tell_the_same_reduction(report: Path) -> None:
    compared = json.loads((report / "results.json").read_text(encoding="utf-8"))["comparison"]
    page = (report / "report.html").read_text(encoding="utf-8")
    assert f"{100 * compared['tracking_reduction']:.0f} % less" in page
    low, high = compared["tracking_reduction_low"], compared["tracking_reduction_high"]
    assert f"{100 * low:.0f} to {100 * high:.0f} %" in page


def test_tables_say_what_the_document_says(report: Path) -> None:
    document = json.loads((report / "results.json").read_text(encoding="utf-8"))
    measured = pd.read_csv(report / "tables" / "measured.csv")
    tracking = measured[measured["error"] == "tracking"].set_index("run")["rms_m"]
    for run in document["measure"]["runs"]:
        assert tracking[run["name"]] == pytest.approx(run["tracking"]["rms_m"], rel=1e-8)
    regions = sum(len(run["regions"]) for run in document["locate"]["runs"])
    assert len(pd.read_csv(report / "tables" / "regions.csv")) == regions


def test_the_same_answers_give_the_same_bytes_but_for_the_line_with_the_date(
    answers: Answers, report: Path, tmp_path: Path
) -> None:
    later = datetime(2032, 1, 1, tzinfo=UTC)
    write_answers(answers, tmp_path, formats=("html", "md"), command="armeval report zigzag.toml", written=later)
    first, second = _files(report), _files(tmp_path)
    assert first.keys() == second.keys()
    differing = [name for name in first if first[name] != second[name]]
    assert differing == ["report.html", "report.md"]
    for name in differing:
        lines = zip(first[name].decode().splitlines(), second[name].decode().splitlines(), strict=True)
        changed = [(old, new) for old, new in lines if old != new]
        assert len(changed) == 1
        assert "2031-05-04 12:30" in changed[0][0]
        assert "2032-01-01 00:00" in changed[0][1]


def test_asking_again_gives_the_same_report(tmp_path: Path) -> None:
    for name in ("one", "other"):
        write_report(small_trial(laps=1), tmp_path / name, written=WRITTEN)
    assert _files(tmp_path / "one") == _files(tmp_path / "other")


def test_the_page_asks_for_nothing_outside_itself(report: Path) -> None:
    page = (report / "report.html").read_text(encoding="utf-8")
    assert re.findall(r"<(?:link|img|iframe|object|embed|base)\b", page) == []
    assert re.findall(r"""(?:src|href)=["'](?!#)[^"']*""", page) == []
    assert "@import" not in page
    assert re.findall(r"url\((?!#)", page) == []


def test_every_input_file_is_named_with_size_and_sum(answers: Answers, tmp_path: Path) -> None:
    source = tmp_path / "my trial.toml"
    source.write_text("made up", encoding="utf-8")
    known = replace(answers, trial=replace(answers.trial, files=(str(source),), source=str(source)))
    out = tmp_path / "report"
    out.mkdir()
    write_answers(known, out, written=WRITTEN)
    page = (out / "report.html").read_text(encoding="utf-8")
    told = json.loads((out / "results.json").read_text(encoding="utf-8"))["provenance"]
    total = hashlib.sha256(b"made up").hexdigest()
    assert told["files"] == [{"file": "my trial.toml", "bytes": 7, "sha256": total}]
    assert total in page
    assert {"armeval", "Python", "numpy", "numba"} <= told["versions"].keys()
    assert told["parameters"]["compensation.table_bins"] == "256"
    assert told["parameters"]["joint.elbow.coulomb_friction"] == "0.004"


def test_a_folder_with_files_is_left_alone(tmp_path: Path) -> None:
    (tmp_path / "notes.txt").write_text("mine", encoding="utf-8")
    with pytest.raises(InputError, match="not empty"):
        write_report(small_trial(laps=0), tmp_path)
    assert [file.name for file in tmp_path.iterdir()] == ["notes.txt"]


def test_forcing_keeps_the_files_that_are_not_the_reports(tmp_path: Path) -> None:
    (tmp_path / "notes.txt").write_text("mine", encoding="utf-8")
    (tmp_path / "report.html").write_text("old", encoding="utf-8")
    write_report(small_trial(laps=0), tmp_path, force=True)
    assert (tmp_path / "notes.txt").read_text(encoding="utf-8") == "mine"
    assert (tmp_path / "report.html").read_text(encoding="utf-8").startswith("<!DOCTYPE html>")


def test_a_report_that_fails_leaves_nothing_behind(tmp_path: Path) -> None:
    with pytest.raises(InputError, match="no run `other`"):
        write_report(small_trial(laps=0), tmp_path / "out", after="other")
    assert list(tmp_path.iterdir()) == []


def test_an_unknown_format_is_refused_before_any_work(tmp_path: Path) -> None:
    with pytest.raises(InputError, match="no format `htm`"):
        write_report(small_trial(laps=0), tmp_path / "out", formats=["htm"])  # type: ignore[list-item]
    assert list(tmp_path.iterdir()) == []


def test_without_its_library_a_pdf_is_refused_with_the_way_out(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    import sys

    monkeypatch.setitem(sys.modules, "weasyprint", None)
    with pytest.raises(InputError, match=r"weasyprint, which is not installed.*armeval\[pdf\]"):
        write_report(small_trial(laps=0), tmp_path / "out", formats=["pdf"])


def test_the_summary_is_short_and_lets_names_stand_for_themselves(report: Path) -> None:
    summary = (report / "report.md").read_text(encoding="utf-8")
    assert len(summary.splitlines()) < 60
    assert "<script>" not in summary
    assert r"\<script\>bare\</script\>" in summary
    assert "certifies nothing" in summary


def test_a_pdf_has_pages_of_a4(answers: Answers, tmp_path: Path) -> None:
    try:
        import weasyprint
    except (ImportError, OSError) as missing:
        pytest.skip(f"weasyprint cannot be used here: {missing}")
    assert weasyprint.__version__
    write_answers(answers, tmp_path, formats=("pdf",), written=WRITTEN)
    assert (tmp_path / "report.pdf").read_bytes().startswith(b"%PDF")
    if reader := shutil.which("pdfinfo"):
        told = subprocess.run([reader, tmp_path / "report.pdf"], capture_output=True, text=True, check=True).stdout
        assert "(A4)" in told
        assert 4 <= int(told.split("Pages:")[1].split()[0]) <= 10
    assert not (tmp_path / "report.html").exists()

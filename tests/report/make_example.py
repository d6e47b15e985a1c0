"""Write the demo's report into ``reports/harbour``, as a worked example::

python -m tests.report.make_example
"""

from __future__ import annotations

import contextlib
import shutil
import tempfile
from datetime import datetime
from pathlib import Path

from armeval.files.demo import write_demo
from armeval.files.trial_file import read_trial
from armeval.report import write_report

EXAMPLE = Path(__file__).parents[2] / "reports" / "harbour"
KEPT = ("report.html", "report.md", "results.json")
"""Tables and figures are left out: the page and the document hold all of it."""


def make_example(folder: Path, written: datetime | None = None) -> Path:
    """Write the demo and its report below a folder; give the report's folder.

    Files are named as a person in that folder would name them, so that the report is the same wherever it is made.
    """
    with contextlib.chdir(folder):
        trial = read_trial(write_demo("harbour-demo"))
        command = "armeval demo harbour-demo"
        write_report(trial, "report", formats=("html", "md"), command=command, written=written)
    return folder / "report"


if __name__ == "__main__":
    with tempfile.TemporaryDirectory() as folder:
        report = make_example(Path(folder))
        EXAMPLE.mkdir(parents=True, exist_ok=True)
        for name in KEPT:
            shutil.copyfile(report / name, EXAMPLE / name)

"""Are these files sound? Every finding at once, before anything is computed."""

from __future__ import annotations

import os
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from armeval.errors import Finding, Findings, InputError, near
from armeval.evaluate.document import JsonValue, as_text, document
from armeval.files.arm_file import load_arm
from armeval.files.arm_table import ARM_SCHEMA
from armeval.files.doubts import doubt_arm, doubt_trial
from armeval.files.text_file import read_text, what_is_there
from armeval.files.toml_file import read_toml
from armeval.files.trial_file import read_trial
from armeval.files.trial_table import TRIAL_SCHEMA
from armeval.progress import Progress, silent

if TYPE_CHECKING:
    import pandas as pd

_COLUMNS = ("level", "file", "place", "what", "mend")


@dataclass(frozen=True)
class CheckResult:
    """What was found in a file and in those that it names.

    Attributes
    ----------
    title
        Of the trial; the file's name where there is none.
    findings
        Errors and warnings, in the order of the files.
    """

    title: str
    findings: tuple[Finding, ...]

    @property
    def has_errors(self) -> bool:
        """Whether anything is wrong, not only doubtful."""
        return any(finding.level == "error" for finding in self.findings)

    def to_frame(self) -> pd.DataFrame:
        """Give the findings as a table: level, file, place, what, mend."""
        import pandas as pd

        return pd.DataFrame(self._rows(), columns=list(_COLUMNS))

    def to_document(self) -> dict[str, JsonValue]:
        """Give the findings as the JSON document ``armeval/check/1``."""
        warnings = [str(finding) for finding in self.findings if finding.level == "warning"]
        return document("check", self.title, warnings, {"findings": self._rows()})

    def to_json(self) -> str:
        """Write the document as text."""
        return as_text(self.to_document())

    def _rows(self) -> list[dict[str, str]]:
        return [{column: getattr(finding, column) for column in _COLUMNS} for finding in self.findings]


def check(path: str | os.PathLike[str], *, progress: Progress = silent) -> CheckResult:
    """Look for everything that is wrong or doubtful in a file and in those that it names.

    Nothing is raised: a file that cannot be read at all is a finding like any other.

    Parameters
    ----------
    path
        A ``trial.toml``, an ``arm.toml`` or a URDF.
    progress
        Told how many logs are read.
    """
    found = Findings(os.fspath(path))
    title = Path(path).name
    try:
        if Path(path).suffix == ".urdf":
            _check_urdf(path, found)
        else:
            title = _check_toml(path, found, progress) or title
    except InputError as fault:
        found.take(fault)
    return CheckResult(title, tuple(dict.fromkeys(found.found)))


def _check_urdf(path: str | os.PathLike[str], found: Findings) -> None:
    from armeval.files.chains.urdf_text import parse
    from armeval.files.chains.urdf_tree import moving_chain

    moving_chain(parse(read_text(path), found), None, found)


def _check_toml(path: str | os.PathLike[str], found: Findings, progress: Progress) -> str:
    """Check a trial or an arm and give its title."""
    if Path(path).is_dir():
        raise InputError(
            "it is a directory", f"name a trial.toml or an arm.toml; {what_is_there(Path(path))}", file=path
        )
    content = read_toml(path)
    schema = str(content.get("schema", ARM_SCHEMA if "urdf" in content else TRIAL_SCHEMA))
    kind = schema.split("/")[1] if schema.count("/") == 2 else ""
    if kind == "arm":
        arm = load_arm(path, found).arm
        if arm is None:
            return ""
        doubt_arm(arm, found)
        return arm.name
    if kind == "trial":
        trial = read_trial(path, findings=found, progress=progress)
        heard = Findings(os.fspath(Path(path).parent / content["arm"]))
        doubt_arm(trial.arm, heard)
        found.extend(heard.found)
        doubt_trial(trial, found)
        return trial.title
    raise InputError(
        f"the schema `{schema}` cannot be checked", near(schema, (ARM_SCHEMA, TRIAL_SCHEMA)), file=path, place="schema"
    )

"""What can be wrong with what a person gives us, said so that they can mend it."""

from __future__ import annotations

import difflib
import os
from collections.abc import Iterable
from dataclasses import dataclass, field, replace
from typing import Literal

Level = Literal["error", "warning"]


class InputWarning(UserWarning):
    """Something doubtful in an input that does not stop the work; its text is a :class:`Finding`'s."""


@dataclass(frozen=True)
class Finding:
    """One thing that is wrong or doubtful in an input.

    Attributes
    ----------
    level
        ``error`` stops the work, ``warning`` goes along with the result.
    what
        What is wrong, with the value found.
    mend
        What to change so that it is right.
    file
        The file as the user named it; empty when it is not about a file.
    place
        Where in the file: row, column, table and key, or joint.
    """

    level: Level
    what: str
    mend: str
    file: str = ""
    place: str = ""

    def __str__(self) -> str:
        where = ", ".join(part for part in (self.file, self.place) if part)
        told = f"{where}: {self.what}" if where else self.what
        return f"{told} ({self.mend})" if self.mend else told


class InputError(ValueError):
    """The input cannot be used. Carries every fault that was found, not only the first.

    Parameters
    ----------
    what, mend, file, place
        As in :class:`Finding`; one error is made of them.
    """

    def __init__(self, what: str, mend: str = "", *, file: str | os.PathLike[str] = "", place: str = "") -> None:
        self.findings: tuple[Finding, ...] = (Finding("error", what, mend, os.fspath(file), place),)
        super().__init__(str(self.findings[0]))

    @classmethod
    def of(cls, findings: Iterable[Finding]) -> InputError:
        """Make one error of several findings; at least one of them must be an error."""
        gathered = tuple(findings)
        error = cls("", "")
        error.findings = gathered
        error.args = ("\n".join(str(finding) for finding in gathered if finding.level == "error"),)
        return error

    def placed(self, *, file: str | os.PathLike[str] = "", place: str = "") -> InputError:
        """Give the same error with file and place filled in where a finding lacks them."""
        return InputError.of(
            replace(finding, file=finding.file or os.fspath(file), place=finding.place or place)
            for finding in self.findings
        )


@dataclass
class Findings:
    """Gathers the findings of one file, so that all of them are reported at once.

    Parameters
    ----------
    file
        The file that findings without a file of their own are about.
    """

    file: str = ""
    found: list[Finding] = field(default_factory=list)

    def error(self, what: str, mend: str = "", *, place: str = "", file: str = "") -> None:
        """Note an error; work goes on so that further faults are found too."""
        self.found.append(Finding("error", what, mend, file or self.file, place))

    def warning(self, what: str, mend: str = "", *, place: str = "", file: str = "") -> None:
        """Note something doubtful that does not stop the work."""
        self.found.append(Finding("warning", what, mend, file or self.file, place))

    def take(self, error: InputError, *, place: str = "") -> None:
        """Note all findings of an error that was raised further down."""
        self.found.extend(error.placed(file=self.file, place=place).findings)

    def extend(self, findings: Iterable[Finding]) -> None:
        """Note findings that were made elsewhere."""
        self.found.extend(findings)

    @property
    def has_errors(self) -> bool:
        """Whether any error was noted."""
        return any(finding.level == "error" for finding in self.found)

    @property
    def warnings(self) -> tuple[Finding, ...]:
        """The findings that do not stop the work."""
        return tuple(finding for finding in self.found if finding.level == "warning")

    def raise_errors(self) -> None:
        """Raise one :class:`InputError` with everything found, if there is an error among it."""
        if self.has_errors:
            raise InputError.of(self.found)


def near(word: str, known: Iterable[str]) -> str:
    """Say which known word was probably meant: ``did you mean `stiffness`?`` or the list of known ones."""
    choices = sorted(known)
    close = difflib.get_close_matches(word, choices, n=1, cutoff=0.6)
    if close:
        return f"did you mean `{close[0]}`?"
    return "known here: " + ", ".join(f"`{choice}`" for choice in choices)

"""Which runs the report puts side by side, each with everything that is known of it."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from armeval.evaluate.locate import Location, RunSticking
from armeval.evaluate.predict import PredictedRun
from armeval.evaluate.run_errors import RunErrors
from armeval.plots.style import AFTER, BEFORE, PREDICTED_AFTER, PREDICTED_BEFORE, Stroke
from armeval.report.answers import Answers


@dataclass(frozen=True, eq=False)
class ShownRun:
    """One of the at most two runs that figures show.

    Attributes
    ----------
    source
        ``log`` where the run's logs are shown, ``prediction`` where there are none to compare.
    errors, sticking
        Tip error and sticking from that source.
    predicted, predicted_sticking
        The same run as predicted.
    stroke, predicted_stroke
        How it is drawn in every figure.
    """

    source: Literal["log", "prediction"]
    errors: RunErrors
    sticking: RunSticking
    predicted: PredictedRun
    predicted_sticking: RunSticking
    stroke: Stroke
    predicted_stroke: Stroke

    @property
    def name(self) -> str:
        """The run's name."""
        return self.errors.name

    @property
    def laps(self) -> int:
        """How many laps are shown."""
        return len(self.errors.tracks)

    @property
    def state(self) -> str:
        """Bare or compensated."""
        return "compensated" if self.errors.compensated else "bare"


def shown_runs(answers: Answers) -> tuple[ShownRun, ...]:
    """Give the two runs that are compared; where there is no such pair, the first run alone."""
    if answers.before is not None and answers.after is not None:
        return (
            _shown(answers, answers.before, BEFORE, PREDICTED_BEFORE),
            _shown(answers, answers.after, AFTER, PREDICTED_AFTER),
        )
    measured = answers.measurement.runs if answers.measurement is not None else ()
    alone = measured[0] if measured else answers.prediction.runs[0].errors
    strokes = (AFTER, PREDICTED_AFTER) if alone.compensated else (BEFORE, PREDICTED_BEFORE)
    return (_shown(answers, alone, *strokes),)


def _shown(answers: Answers, errors: RunErrors, stroke: Stroke, predicted_stroke: Stroke) -> ShownRun:
    source = errors.tracks[0].source
    return ShownRun(
        source=source,
        errors=errors,
        sticking=_sticking(answers.location, errors.name, source),
        predicted=answers.prediction.run(errors.name),
        predicted_sticking=_sticking(answers.location, errors.name, "prediction"),
        stroke=stroke,
        predicted_stroke=predicted_stroke,
    )


def _sticking(location: Location, name: str, source: str) -> RunSticking:
    return next(run for run in location.runs if run.name == name and run.source == source)

"""Where a trial's runs stick: its logs where there are any, and the prediction beside them."""

from __future__ import annotations

from collections.abc import Sequence

from armeval.evaluate.locate import Location, locate
from armeval.evaluate.measure import Measurement
from armeval.evaluate.predict import Prediction
from armeval.model.trial import Trial


def locate_trial(trial: Trial, measurement: Measurement | None, prediction: Prediction | None) -> Location:
    """Find where the arm sticks, from the measured laps, the predicted ones, or both.

    Parameters
    ----------
    trial
        The trial that both belong to.
    measurement
        What the logs say; None where no run has logs.
    prediction
        What the replay says; None to leave it out.

    Raises
    ------
    InputError
        If there is neither.
    """
    tracks = [run.tracks for run in measurement.runs] if measurement is not None else []
    if prediction is not None:
        tracks += [run.errors.tracks for run in prediction.runs]
    return locate(
        trial.arm,
        tracks,
        rule=trial.sticking,
        compensation=trial.compensation,
        counterfactuals=prediction.counterfactuals if prediction is not None else None,
        ratios={run.name: run.ratio for run in prediction.runs} if prediction is not None else None,
        trial=trial.title,
        warnings=_warnings(measurement, prediction),
    )


def _warnings(measurement: Measurement | None, prediction: Prediction | None) -> Sequence[str]:
    said = (*(measurement.warnings if measurement else ()), *(prediction.warnings if prediction else ()))
    return tuple(dict.fromkeys(said))


def has_logs(trial: Trial) -> bool:
    """Whether any run of the trial that the servo drove holds a lap."""
    return bool(trial.driven)

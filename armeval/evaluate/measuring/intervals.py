"""How far an RMS, or its reduction, could be off: confidence intervals that respect autocorrelation.

Errors along a path hang together: a second of samples at 1 kHz is worth a few independent ones, not a thousand. Whole
blocks of path are therefore drawn with replacement instead of samples (circular block bootstrap, Politis & Romano 1992,
cited from memory), with the block length that Politis & White (2004) choose from the errors themselves, corrected by
Patton, Politis & White (2009).

Laps of a run follow one path, and what cogging does to the tip comes back in every lap at the same place. Laps are
therefore laid side by side along the path, and one draw takes the same blocks of path from all of them: what repeats
from lap to lap counts once, what does not averages out. Where whole laps differ by more than their blocks explain
(an arm that warms up), the spread between laps widens the interval. Before and after are paired likewise: both runs
follow the same path, so one draw takes the same blocks from both.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from scipy import stats

from armeval.arrays import FloatArray, IntArray
from armeval.errors import InputError
from armeval.kernels.block_bootstrap import studentised_shifts
from armeval.kernels.moments import squares_in_bins

METHOD = (
    "circular block bootstrap along the path, studentised, on the logarithm of the mean square; block length after "
    "Politis & White (2004) as corrected in 2009; the same blocks are drawn from all laps (and from both runs of a "
    "reduction), and a spread between laps beyond what their blocks explain widens the interval"
)
_BINS = 1000
_DRAWS = 999
_MOST_BLOCKS = 250
_LAPS_DIFFER = 0.99


class BlockLength(NamedTuple):
    """What the errors' autocovariance says about blocks.

    Attributes
    ----------
    stationary, circular
        Best block length [samples] for the stationary and the circular bootstrap of a mean.
    variance
        Long-run variance: n times the variance of the mean of n samples.
    lags
        Width of the lag window, M.
    """

    stationary: float
    circular: float
    variance: float
    lags: int


@dataclass(frozen=True)
class Interval:
    """A confidence interval and what it rests on.

    Attributes
    ----------
    low, high
        Its ends; NaN where a single sample says nothing about spread.
    effective_samples
        How many independent samples would give an equally sure mean square.
    block
        Length of the drawn blocks as a share of the lap.
    """

    low: float
    high: float
    effective_samples: float
    block: float


def block_length(series: FloatArray) -> BlockLength:
    """Choose a block length from the data.

    With autocovariances R(k), a flat-top window lambda over 2 m lags, m the lag from which on correlation is
    insignificant, G = sum lambda |k| R(k) and sigma^2 = sum lambda R(k)::

        b = (2 G^2 n / d)^(1/3),  d = 2 sigma^4 (stationary) or 4/3 sigma^4 (circular)

    as in Politis & White 2004, Econometric Reviews 23(1), with the constants of the 2009 correction.

    Parameters
    ----------
    series
        Shape (n,), n >= 2.
    """
    n = len(series)
    centred = series - series.mean()
    run = max(5, int(np.log10(n)))
    most = min(int(np.ceil(np.sqrt(n))) + run, n - 1)
    # The autocovariances by FFT; padded, so that the ends do not meet.
    spectrum = np.abs(np.fft.rfft(centred, 2 * n)) ** 2
    covariance = np.fft.irfft(spectrum, 2 * n)[: most + 1] / n
    if covariance[0] <= 0.0:
        return BlockLength(1.0, 1.0, 0.0, 1)
    insignificant = np.abs(covariance) < 2.0 * np.sqrt(np.log10(n) / n) * covariance[0]
    quiet = np.convolve(insignificant, np.ones(run), "valid") > run - 0.5
    lags = min(2 * max(int(np.argmax(quiet)), 1), most) if quiet.any() else most
    lag = np.arange(1, lags + 1)
    window = np.minimum(1.0, 2.0 * (1.0 - lag / lags))
    slope = 2.0 * float(np.sum(window * lag * covariance[1 : lags + 1]))
    # The flat-top window is not positive definite; a long-run variance far below the plain one is its artefact.
    variance = max(float(covariance[0] + 2.0 * np.sum(window * covariance[1 : lags + 1])), 0.05 * float(covariance[0]))
    longest = np.ceil(min(3.0 * np.sqrt(n), n / 3.0))
    stationary, circular = (
        float(np.clip((2.0 * slope**2 * n / (factor * variance**2)) ** (1.0 / 3.0), 1.0, longest))
        for factor in (2.0, 4.0 / 3.0)
    )
    return BlockLength(stationary, circular, variance, lags)


def rms_interval(laps: Sequence[FloatArray], *, level: float = 0.95, seed: int = 0) -> tuple[float, float]:
    """Interval of the RMS over all samples of all laps.

    Parameters
    ----------
    laps
        Error norms [m] of each lap, shape (k,) each; the laps follow the same path.
    level
        Confidence level.
    seed
        Of the random draws: the same errors give the same interval.

    Returns
    -------
    Low and high end [m]; NaN where there is a single sample.
    """
    found = rms_bootstrap(laps, level=level, seed=seed)
    return found.low, found.high


def rms_bootstrap(laps: Sequence[FloatArray], *, level: float = 0.95, seed: int = 0) -> Interval:
    """Give the interval of :func:`rms_interval` with the effective sample size and block length it rests on."""
    laps = [lap for lap in laps if len(lap)]
    if not laps:
        raise InputError("there is no sample to sum up", "log at least one whole lap")
    bins = min([_BINS, *(len(lap) for lap in laps)])
    binned = _Binned.of(laps, [np.linspace(0, len(lap), bins + 1).astype(np.int64) for lap in laps])
    found = _bootstrap([binned], [1.0], level, seed)
    mean_square = float(np.exp(found.value))
    spread = binned.fourth_moment - mean_square**2
    samples = float(binned.count.sum())
    variance = found.variance * mean_square**2
    effective = min(spread / variance, samples) if variance > 0.0 else samples
    return Interval(float(np.exp(0.5 * found.low)), float(np.exp(0.5 * found.high)), effective, found.block)


def reduction_interval(
    before: Sequence[FloatArray],
    after: Sequence[FloatArray],
    before_arcs: Sequence[FloatArray] | None = None,
    after_arcs: Sequence[FloatArray] | None = None,
    *,
    level: float = 0.95,
    seed: int = 0,
) -> tuple[float, float]:
    """Interval of the reduction 1 - RMS after / RMS before, paired along the path.

    Parameters
    ----------
    before, after
        Error norms [m] of each lap of the two runs, shape (k,) each.
    before_arcs, after_arcs
        Arc length of the target [m] at each of those samples, never falling; without them the same share of a lap is
        taken for the same place on the path.
    level, seed
        As in :func:`rms_interval`.

    Returns
    -------
    Low and high end as fractions: 1 is an error that vanished, below 0 it has grown.
    """
    laps = [*before, *after]
    bins = min([_BINS, *(len(lap) for lap in laps)])
    if before_arcs is None or after_arcs is None:
        edges = [np.linspace(0, len(lap), bins + 1).astype(np.int64) for lap in laps]
    else:
        arcs = [*before_arcs, *after_arcs]
        places = np.linspace(min(arc[0] for arc in arcs), max(arc[-1] for arc in arcs), bins + 1)[1:-1]
        edges = [np.concatenate([[0], np.searchsorted(arc, places), [len(arc)]]).astype(np.int64) for arc in arcs]
    runs = [_Binned.of(before, edges[: len(before)]), _Binned.of(after, edges[len(before) :])]
    found = _bootstrap(runs, [-1.0, 1.0], level, seed)
    return float(1.0 - np.exp(0.5 * found.high)), float(1.0 - np.exp(0.5 * found.low))


@dataclass(frozen=True, eq=False)
class _Binned:
    """Squared errors of one run in bins along the path: sums and counts, shape (laps, bins)."""

    total: FloatArray
    count: FloatArray
    fourth_moment: float

    @classmethod
    def of(cls, laps: Sequence[FloatArray], edges: Sequence[IntArray]) -> _Binned:
        count = np.array([np.diff(edge) for edge in edges], dtype=np.float64)
        found = [squares_in_bins(np.ascontiguousarray(lap), edge) for lap, edge in zip(laps, edges, strict=True)]
        fourth = sum(fourth for _, fourth in found) / float(count.sum())
        return cls(np.array([squares for squares, _ in found]), count, fourth)


class _LogInterval(NamedTuple):
    """A sum of logarithms of mean squares, its ends and variance, and the block length as a share of the lap."""

    value: float
    low: float
    high: float
    variance: float
    block: float


def _bootstrap(runs: Sequence[_Binned], signs: Sequence[float], level: float, seed: int) -> _LogInterval:
    """Interval of theta = sum of sign * log(mean square) over runs, all runs and laps drawn at the same places.

    Studentising keeps the coverage where few blocks are drawn and squared errors are skew; the variance is the flat-top
    estimate because the variance between blocks is biased towards zero.
    """
    total = np.array([run.total.sum(axis=0) for run in runs])
    count = np.array([run.count.sum(axis=0) for run in runs])
    sign = np.array(signs)[:, None]
    bins = total.shape[1]
    mean = total.sum(axis=1, keepdims=True) / count.sum(axis=1, keepdims=True)
    if (mean <= 0.0).any():
        with np.errstate(divide="ignore", invalid="ignore"):
            theta = float(np.nansum(sign * np.log(mean)))
        return _LogInterval(theta, theta, theta, 0.0, 1.0)
    theta = float(np.sum(sign * np.log(mean)))
    if bins < 2:
        return _LogInterval(theta, float("nan"), float("nan"), float("nan"), 1.0)
    influence = np.sum(sign * (total - mean * count) / (mean * count.mean(axis=1, keepdims=True)), axis=0)
    chosen = block_length(influence)
    length = max(1, round(chosen.circular), bins // _MOST_BLOCKS)
    variance = chosen.variance / bins / (1.0 - chosen.lags / bins)
    around = [
        np.cumsum(np.concatenate([np.zeros((len(x), 1)), x, x[:, :length]], axis=1), axis=1) for x in (total, count)
    ]
    start = np.random.default_rng(seed).integers(0, bins, (_DRAWS, -(-bins // length)))
    shifts = studentised_shifts(around[0], around[1], np.array(signs), start, length, bins)
    shifts = shifts[np.isfinite(shifts)]
    tail = 0.5 * (1.0 - level)
    below, above = np.quantile(shifts, [tail, 1.0 - tail]) if len(shifts) else (0.0, 0.0)
    laps_variance, laps_half = _between_laps(runs, length, level)
    return _LogInterval(
        value=theta,
        low=theta - float(np.hypot(max(above, 0.0) * np.sqrt(variance), laps_half)),
        high=theta + float(np.hypot(max(-below, 0.0) * np.sqrt(variance), laps_half)),
        variance=variance + laps_variance,
        block=length / bins,
    )


def _between_laps(runs: Sequence[_Binned], length: int, level: float) -> tuple[float, float]:
    """Variance of the mean log mean square, and half width, for what whole laps differ beyond their blocks.

    An F ratio of the variance between laps to the one that blocks of the laps' differences explain decides whether laps
    differ at all; three laps are too few to draw laps themselves.
    """
    variance = half = 0.0
    for run in runs:
        laps, bins = run.total.shape
        if laps < 2 or bins < 2 * length:
            continue
        mean = run.total.sum() / run.count.sum()
        each = run.total.sum(axis=1, keepdims=True) / run.count.sum(axis=1, keepdims=True)
        influence = (run.total - each * run.count) / (mean * run.count.mean(axis=1, keepdims=True))
        influence = influence - influence.mean(axis=0)
        blocks = bins // length
        within = influence[:, : blocks * length].reshape(laps, blocks, length).sum(axis=2) / bins
        explained = float(np.sum(within**2)) / (laps - 1)
        found = float(np.var(each / mean, ddof=1))
        if found > explained * stats.f.ppf(_LAPS_DIFFER, laps - 1, (laps - 1) * (blocks - 1)):
            excess = (found - explained) / laps
            variance += excess
            half = float(np.hypot(half, stats.t.ppf(0.5 * (1.0 + level), laps - 1) * np.sqrt(excess)))
    return variance, half

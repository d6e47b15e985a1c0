"""The cogging torque that is left to move the rotor: the map, less what the compensation table takes off it."""

from __future__ import annotations

import numpy as np

from armeval.arrays import FloatArray
from armeval.evaluate.cogging.cog_loss import compensation_table, lookup
from armeval.kernels.periodic import hermite_table
from armeval.model.arm import Arm
from armeval.model.cogmap import CogMap
from armeval.model.trial import Compensation

_LEAST_NODES = 16384
_NODES_PER_BIN = 16
_HAIR = 1e-9


def net_cogging(
    arm: Arm, *, compensated: bool = False, compensation: Compensation | None = None, seed: int = 0
) -> tuple[FloatArray, ...]:
    """Tabulate each motor's cogging torque and its slope over one turn.

    Where the run is compensated, the table that the firmware stores is looked up at the true angle plus the index
    error (one standard deviation) and taken off; its noise is that of the replay with the same seed.

    Parameters
    ----------
    arm
        The arm, n joints.
    compensated
        Whether compensation acts.
    compensation
        What the firmware's table can do; None: the default table.
    seed
        Of the table's noise.

    Returns
    -------
    n tables for :func:`armeval.kernels.periodic.periodic_value`, each of shape (m, 2): torque [N m] and slope
    [N m/rad] over the motor's mechanical angle. A table without interpolation jumps from bin to bin; here the
    jump is spread over a sixteenth of a bin, and the slope is taken over a whole one.
    """
    rng = np.random.default_rng(seed)
    table_law = Compensation() if compensation is None else compensation
    tables = []
    for drive in arm.drives:
        if drive.cog_map is None:
            tables.append(np.zeros((8, 2)))
        elif compensated:
            tables.append(_residual(drive.cog_map, table_law, rng))
        else:
            tables.append(hermite_table(_even_values(drive.cog_map, _nodes(drive.cog_map))))
    return tuple(tables)


def pitch(cog_map: CogMap | None) -> float:
    """Motor angle [rad] of one period of the map's strongest order; a whole turn where there is no map."""
    if cog_map is None:
        return 2.0 * np.pi
    strength = np.abs(cog_map.spectrum)
    strength[0] = 0.0
    return 2.0 * np.pi / max(int(np.argmax(strength)), 1)


def _residual(cog_map: CogMap, compensation: Compensation, rng: np.random.Generator) -> FloatArray:
    bins = compensation.table_bins
    m = bins * max(_NODES_PER_BIN, -(-_nodes(cog_map) // bins))
    nodes = hermite_table(_even_values(cog_map, m))
    stored = compensation_table(cog_map, compensation, rng)
    seen = 2.0 * np.pi * np.arange(m) / m + compensation.index_error
    half = np.pi / bins if compensation.interpolation == "nearest" else 2.0 * np.pi / m
    # A hair to one side, so that a window of just one bin never has both its ends on a jump.
    ahead = lookup(stored, seen + half + _HAIR, compensation.interpolation)
    behind = lookup(stored, seen - half + _HAIR, compensation.interpolation)
    nodes[:, 0] -= lookup(stored, seen, compensation.interpolation)
    nodes[:, 1] -= (ahead - behind) / (2.0 * half)
    return nodes


def _nodes(cog_map: CogMap) -> int:
    return max(_LEAST_NODES, len(cog_map.torque))


def _even_values(cog_map: CogMap, m: int) -> FloatArray:
    """Torque at m even angles of the turn: the map's trigonometric polynomial."""
    spectrum = np.zeros(m // 2 + 1, dtype=np.complex128)
    spectrum[: cog_map.bandwidth + 1] = cog_map.spectrum
    return np.asarray(np.fft.irfft(spectrum, n=m) * m)

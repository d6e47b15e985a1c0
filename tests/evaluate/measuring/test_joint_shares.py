"""Each joint's part in the tip error."""

from __future__ import annotations

import numpy as np
import pytest

from armeval.evaluate.lap_track import LapTrack
from armeval.evaluate.measuring.joint_shares import joint_shares
from armeval.kernels.chain import tip_positions
from armeval.model.arm import Arm
from tests.planar_arms import planar_arm


def _lap(arm: Arm, target: np.ndarray, error: np.ndarray) -> LapTrack:
    k, n = target.shape
    tip, aim = (tip_positions(arm.chain.arrays, np.ascontiguousarray(q)) for q in (target + error, target))
    return LapTrack(
        run="bare",
        compensated=False,
        source="log",
        lap=1,
        file=None,
        time=np.arange(k) * 1e-3,
        arc=np.linspace(0.0, 0.1, k),
        angle=target + error,
        target=target,
        tip=tip,
        target_tip=aim,
        deviation=np.zeros(k),
        lag=np.zeros(k),
        resolution=np.zeros(n),
    )


def test_one_erring_joint_carries_it_all() -> None:
    arm = planar_arm([0.2, 0.1], [0.0, 0.5])
    target = np.tile([0.3, 0.8], (50, 1))
    error = np.zeros((50, 2))
    error[:, 1] = 0.01
    shoulder, elbow = joint_shares(arm, [_lap(arm, target, error)])
    assert (shoulder.share, elbow.share) == pytest.approx((0.0, 1.0), abs=1e-12)
    assert elbow.error_rms == pytest.approx(0.01)
    assert elbow.tip_rms == pytest.approx(0.1 * 0.01, rel=1e-6)  # radius of the last link times its angle


def test_shares_add_up_to_the_whole() -> None:
    arm = planar_arm([0.2, 0.1], [0.0, 0.5])
    draw = np.random.default_rng(3)
    target = np.cumsum(draw.normal(0.0, 0.01, (400, 2)), axis=0) + np.array([0.0, 1.0])
    lap = _lap(arm, target, draw.normal(0.0, 0.01, (400, 2)))
    shares = joint_shares(arm, [lap, lap])
    assert sum(share.share for share in shares) == pytest.approx(1.0, abs=1e-12)


def test_stretched_out_the_nearer_joint_carries_more() -> None:
    """Two links of 0.2 m and 0.1 m in line, both joints off by 0.01 rad: the tip moves 3 mm and 1 mm the same way."""
    arm = planar_arm([0.2, 0.1], [0.0, 0.0])
    shares = joint_shares(arm, [_lap(arm, np.zeros((10, 2)), np.full((10, 2), 0.01))])
    assert [share.share for share in shares] == pytest.approx([0.75, 0.25], abs=1e-4)


def test_what_moves_no_tip_counts_for_nothing() -> None:
    """Three joints and two directions: a motion of the joints that leaves the tip where it is has no share in it."""
    arm = planar_arm([0.2, 0.15, 0.1], [0.0, 0.5, 0.5])
    from armeval.kernels.chain import tip_jacobians

    target = np.tile([0.1, 0.6, 0.7], (20, 1))
    J = tip_jacobians(arm.chain.arrays, target[:1])[0]
    still = np.linalg.svd(J)[2][-1]
    error = np.tile(0.02 * still, (20, 1)) + 1e-4
    shares = joint_shares(arm, [_lap(arm, target, error)])
    assert sum(share.share for share in shares) == pytest.approx(1.0, abs=1e-9)
    assert max(abs(share.share) for share in shares) < 2.0


def test_without_error_there_is_nothing_to_share() -> None:
    arm = planar_arm([0.2, 0.1], [0.0, 0.5])
    shares = joint_shares(arm, [_lap(arm, np.zeros((10, 2)), np.zeros((10, 2)))])
    assert all(np.isnan(share.share) for share in shares)

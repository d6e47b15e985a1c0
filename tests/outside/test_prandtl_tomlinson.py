"""A rotor dragged slowly over one cogging harmonic: folds, jumps and mean torque of the Prandtl-Tomlinson model.

Prandtl 1928 and Tomlinson 1929 (from memory). With phi = N theta, D = N times the target, eta = N T / K the balance is
D = phi + eta sin phi; it folds where cos phi = -1 / eta. The table was computed from that equation with a root finder
apart from this program: fold phi*, target there D*, phi after the jump, jump, mean servo torque over T.
"""

import numpy as np
import pytest
from scipy.optimize import brentq

from armeval.evaluate.plan import plan
from armeval.evaluate.replaying.quasistatic import quasistatic
from armeval.evaluate.replaying.sticking_ratio import sticking_ratio
from armeval.model.planned_path import PlannedPath
from armeval.model.servo import Servo
from tests.planar_arms import harmonic_map, planar_arm

ORDER, AMPLITUDE = 84, 0.02
TABLE = {
    2.0: (2.094395, 3.826446, 5.387598, 3.293203, 0.201452),
    3.0: (1.910633, 4.739060, 5.889591, 3.978958, 0.377131),
    5.0: (1.772154, 6.671134, 6.347881, 4.575727, 0.570962),
    10.0: (1.670964, 11.620838, 6.787629, 5.116666, 0.757171),
}
PITCH = 2.0 * np.pi / ORDER


def arm_of(eta, gear=1.0, **drive):
    stiffness = gear**2 * ORDER * AMPLITUDE / eta
    return planar_arm(
        (0.2,), (0.0,), stiffness=stiffness, gear_ratio=gear, cog_map=harmonic_map(ORDER, AMPLITUDE), **drive
    )


def drag(arm, *angles, seconds=30.0):
    """Turn the joint from one angle to the next; so long that a servo period is a thousandth of a pitch or less."""
    time = np.linspace(0.0, seconds, len(angles))
    return plan(arm, PlannedPath(np.array(angles)[:, None], space="joint", time=time))


@pytest.mark.parametrize("gear", [1.0, -6.0])
@pytest.mark.parametrize("eta", TABLE)
def test_a_dragged_rotor_jumps_at_the_fold_by_the_published_amount(eta, gear):
    fold, target, after, size, mean = TABLE[eta]
    arm = arm_of(eta, gear)
    pitch = PITCH / abs(gear)
    trajectory = drag(arm, 0.0, 6.0 * pitch)
    result = quasistatic(arm, trajectory)
    order = ORDER * abs(gear)
    first = result.jumps[0]
    assert order * first.joint_angle == pytest.approx(fold, abs=2e-6 if eta > 2 else 2e-5)
    assert order * (first.joint_angle + first.size) == pytest.approx(after, abs=2e-5)
    assert order * first.size == pytest.approx(size, abs=2e-5)
    # The trajectory's first sample after the jump is at most one period's way beyond the target of the fold.
    step = order * np.diff(trajectory.joint[:, 0]).max()
    at = order * np.interp(first.time, trajectory.time, trajectory.joint[:, 0])
    assert target - 1e-6 <= at <= target + step + 1e-6
    repeats = (trajectory.joint[:, 0] >= 4.0 * pitch) & (trajectory.joint[:, 0] < 5.0 * pitch)
    pull = -result.deflection[repeats, 0] * arm.drives[0].stiffness / (abs(gear) * AMPLITUDE)
    assert pull.mean() == pytest.approx(mean, abs=2e-3)
    assert first.release == pytest.approx(2.0 * 0.2 * np.sin(first.size / 2.0))


def test_it_jumps_once_a_pitch():
    arm = arm_of(3.0)
    result = quasistatic(arm, drag(arm, 0.0, 8.0 * PITCH))
    places = np.array([jump.joint_angle for jump in result.jumps])
    assert np.diff(places) == pytest.approx(PITCH, abs=1e-9)


def balance(q, target, eta):
    return ORDER * (target - q) - eta * np.sin(ORDER * q)


@pytest.mark.parametrize("eta", [0.3, 0.95])
def test_below_a_ratio_of_one_it_follows_without_a_jump(eta):
    arm = arm_of(eta)
    trajectory = drag(arm, 0.0, 3.0 * PITCH)
    result = quasistatic(arm, trajectory)
    assert result.jumps == ()
    for k in range(0, len(trajectory.time), 997):
        target = trajectory.joint[k, 0]
        truth = brentq(balance, target - 1.0, target + 1.0, args=(target, eta), xtol=1e-14)
        assert result.angle[k, 0] == pytest.approx(truth, abs=1e-9)


def test_back_and_forth_it_jumps_at_mirrored_places():
    arm = arm_of(3.0)
    result = quasistatic(arm, drag(arm, 0.0, 3.0 * PITCH, -3.0 * PITCH))
    forth = [jump.joint_angle for jump in result.jumps if jump.size > 0.0]
    back = [jump.joint_angle for jump in result.jumps if jump.size < 0.0]
    assert ORDER * forth[0] == pytest.approx(TABLE[3.0][0], abs=1e-5)
    folded = np.mod(-ORDER * np.array(back), 2.0 * np.pi)
    assert folded == pytest.approx(TABLE[3.0][0], abs=1e-5)


def test_coulomb_friction_leaves_fold_and_jump_as_they_are():
    # It shifts the target at which the fold is reached by Fc / K, and nothing else.
    friction = 0.3 * AMPLITUDE
    arm = arm_of(3.0, coulomb_friction=friction)
    trajectory = drag(arm, 0.0, 4.0 * PITCH)
    first = quasistatic(arm, trajectory).jumps[0]
    assert ORDER * first.joint_angle == pytest.approx(TABLE[3.0][0], abs=2e-5)
    assert ORDER * first.size == pytest.approx(TABLE[3.0][3], abs=2e-5)
    at = np.interp(first.time, trajectory.time, trajectory.joint[:, 0])
    due = TABLE[3.0][1] / ORDER + friction / arm.drives[0].stiffness
    assert at == pytest.approx(due, abs=2.0 * np.diff(trajectory.joint[:, 0]).max())


@pytest.mark.parametrize("gear", [1.0, -6.0])
@pytest.mark.parametrize("eta", [0.5, 2.0, 10.0])
def test_the_sticking_ratio_is_n_t_over_k(eta, gear):
    arm = arm_of(eta, gear)
    ratio = sticking_ratio(arm, drag(arm, 0.0, 2.0 * PITCH))
    assert ratio.max[0] == pytest.approx(eta, rel=1e-3)
    assert ratio.arm.max() == pytest.approx(eta, rel=1e-3)
    assert np.all(ratio.envelope >= ratio.ratio)


def test_a_tip_spring_on_one_joint_jumps_as_its_joint_stiffness_says():
    # A spring K_x at a tip of lever l turns the joint with K_x l^2, as long as the angles are small: a pitch is 4 deg.
    lever, eta = 0.2, 3.0
    stiffness = ORDER * AMPLITUDE / eta / lever**2
    servo = Servo("tip_impedance", 1e-3, tip_stiffness=(stiffness, stiffness, stiffness))
    arm = planar_arm((lever,), (0.0,), servo=servo, cog_map=harmonic_map(ORDER, AMPLITUDE))
    trajectory = drag(arm, 0.0, 4.0 * PITCH)
    first = quasistatic(arm, trajectory).jumps[0]
    # Lever and pull turn against each other by the deflection d: sin d for d, 0.06 % here.
    assert ORDER * first.joint_angle == pytest.approx(TABLE[eta][0], abs=0.02)
    assert ORDER * first.size == pytest.approx(TABLE[eta][3], abs=0.02)
    assert sticking_ratio(arm, trajectory).arm.max() == pytest.approx(eta, rel=1e-3)

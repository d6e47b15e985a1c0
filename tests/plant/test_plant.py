"""The plant is a tool of other tests, so it is held against textbook cases itself."""

import math
from dataclasses import replace

import mujoco
import numpy as np
import pytest

from tests.plant import shipped
from tests.plant.mujoco_plant import Plant, PlantDrive, PlantServo
from tests.plant.planner import stretch_time, trapezoid
from tests.plant.truth import distance_to_path, rests

WEIGHTLESS = (0.0, 0.0, 0.0)


def one_joint(inertia: float, mass: float = 1.0, lever: float = 0.0) -> str:
    """A body on one joint about y, its centre a lever below the axis; inertia about the centre [kg m^2]."""
    return f"""<robot name="one"><link name="base"/>
    <joint name="swing" type="continuous"><parent link="base"/><child link="bob"/><axis xyz="0 1 0"/></joint>
    <link name="bob"><inertial><origin xyz="0 0 {-lever}"/><mass value="{mass}"/>
    <inertia ixx="{inertia}" iyy="{inertia}" izz="{inertia}" ixy="0" ixz="0" iyz="0"/></inertial></link>
    <joint name="end" type="fixed"><parent link="bob"/><child link="tip"/><origin xyz="0 0 -0.3"/></joint>
    <link name="tip"/></robot>"""


def still(k: int, angle: float = 0.0) -> np.ndarray:
    return np.full((k, 1), angle)


def test_a_small_swing_takes_the_textbook_period():
    mass, lever, inertia = 0.4, 0.25, 2e-3
    plant = Plant(one_joint(inertia, mass, lever), "tip", [PlantDrive()])
    data = mujoco.MjData(plant.model)
    data.qpos[:] = 0.02
    crossings, last = [], 0.02
    while len(crossings) < 3:
        plant.step(data, np.zeros(1))
        if last > 0.0 >= data.qpos[0]:
            crossings.append(data.time)
        last = data.qpos[0]
    period = 2.0 * math.pi * math.sqrt((inertia + mass * lever**2) / (mass * 9.80665 * lever))
    assert crossings[2] - crossings[1] == pytest.approx(period, rel=2e-4)


def test_an_arm_without_friction_keeps_its_energy():
    plant = Plant(shipped.urdf_text("tern"), "stylus_tip", [PlantDrive(rotor_inertia=2e-5)] * 3)
    plant.model.opt.enableflags |= mujoco.mjtEnableBit.mjENBL_ENERGY
    data = mujoco.MjData(plant.model)
    data.qpos[:] = np.radians([0.0, 60.0, -60.0])
    data.qvel[:] = (1.0, 0.0, 0.0)
    mujoco.mj_forward(plant.model, data)
    before = data.energy.sum()
    swing = []
    for _ in range(2000):
        plant.step(data, np.zeros(3))
        swing.append(data.energy[1])
    mujoco.mj_forward(plant.model, data)
    assert data.energy.sum() - before == pytest.approx(0.0, abs=2e-3 * max(swing))


def test_a_coulomb_damped_oscillator_loses_twice_the_dead_band_each_half_cycle():
    """k = 2000, Fc = 10, x0 = 0.053, m = 2: peaks -0.043, 0.033, -0.023, 0.013, rest at -0.003 (Thomson, 2.8)."""
    plant = Plant(one_joint(2.0), "tip", [PlantDrive(coulomb_friction=10.0)], gravity=WEIGHTLESS)
    data = mujoco.MjData(plant.model)
    data.qpos[:] = 0.053
    angles = []
    for _ in range(round(0.7 * 8000)):
        plant.step(data, -2000.0 * data.qpos)
        angles.append(data.qpos[0])
    angles = np.array(angles)
    turns = np.flatnonzero(np.diff(np.sign(np.diff(angles))) != 0)[:4] + 1
    assert angles[turns] == pytest.approx([-0.043, 0.033, -0.023, 0.013], abs=1e-4)
    assert angles[-1] == pytest.approx(-0.003, abs=1e-4)


@pytest.mark.parametrize("share", [0.5, 0.95])
def test_a_stuck_joint_creeps_far_less_than_a_rest_may(share):
    drive = PlantDrive(coulomb_friction=8e-3, static_friction=10e-3)
    plant = Plant(one_joint(1e-4, 0.01), "tip", [drive], gravity=WEIGHTLESS)
    data = mujoco.MjData(plant.model)
    for _ in range(8000):
        plant.step(data, np.array([share * 10e-3]))
    assert abs(data.qpos[0]) < 2e-5  # in one second; a rest by the rule may go 4e-4


def test_a_sliding_joint_speeds_up_by_what_friction_leaves():
    plant = Plant(one_joint(1e-3), "tip", [PlantDrive(coulomb_friction=0.01)], gravity=WEIGHTLESS)
    data = mujoco.MjData(plant.model)
    for _ in range(800):
        plant.step(data, np.array([0.03]))
    assert data.qvel[0] == pytest.approx(0.1 * (0.03 - 0.01) / 1e-3, rel=2e-3)


def test_friction_falls_from_static_to_coulomb_as_stribeck_says():
    drive = PlantDrive(coulomb_friction=1.0, static_friction=1.5, stribeck_speed=0.001)
    plant = Plant(one_joint(1.0), "tip", [drive])
    assert plant.friction_bound(np.array([0.0])) == pytest.approx(1.5)
    assert plant.friction_bound(np.array([0.001])) == pytest.approx(1.0 + 0.5 / math.e)
    assert plant.friction_bound(np.array([0.1])) == pytest.approx(1.0)


def test_a_soft_servo_snaps_where_the_cogging_outpulls_it():
    """Prandtl and Tomlinson: N T / K = 3 folds at N target = 4.739060, the loop's torque peaks at T."""
    order, torque = 84, 0.02
    stiffness = order * torque / 3.0
    drive = PlantDrive(harmonics=((order, -torque, 0.0),), stiffness=stiffness, viscous_friction=0.005)
    plant = Plant(one_joint(1e-5, 1e-3), "tip", [drive], gravity=WEIGHTLESS)
    target = np.concatenate([np.linspace(0.0, 4.4, 1000), np.linspace(4.4, 5.0, 3000)])[:, None] / order
    (lap,) = plant.run(target, np.zeros_like(target), settle=0.0)
    snaps = np.flatnonzero(lap.true_speed[:, 0] > 0.5 * lap.true_speed[:, 0].max())
    assert order * target[snaps[0], 0] == pytest.approx(4.739060, rel=0.02)
    assert lap.torque.max() == pytest.approx(torque, rel=0.02)


def test_an_arm_rests_where_only_gravity_feed_forward_holds_it():
    drives = [replace(drive, harmonics=(), encoder_counts=0.0) for drive in shipped.drives("tern").values()]
    plant = Plant(shipped.urdf_text("tern"), "stylus_tip", drives, shipped.servo("tern"))
    pose = np.tile(np.radians([10.0, 40.0, -90.0]), (300, 1))
    (lap,) = plant.run(pose, np.zeros_like(pose))
    assert np.abs(lap.true_angle - pose).max() < 2e-5
    assert lap.torque[-1] == pytest.approx(plant.gravity_torque(pose[0]), abs=3e-4)  # half a torque step and some


def test_the_friction_band_is_all_that_a_stiff_servo_leaves_without_cogging():
    """Dead band Fc/K: however the joint comes to rest, the servo pulls it that near."""
    drive = PlantDrive(coulomb_friction=0.02, stiffness=20.0, damping=0.2)
    plant = Plant(one_joint(1e-3), "tip", [drive], gravity=WEIGHTLESS)
    (lap,) = plant.run(still(1000), still(1000), start=np.array([0.2]), settle=0.0)
    assert 0.0 < abs(lap.true_angle[-1, 0]) <= 1.001e-3


@pytest.mark.parametrize(
    ("gear", "side", "counts_a_turn"), [(6.0, "motor", 6000.0), (-6.0, "motor", -6000.0), (6.0, "joint", 1000.0)]
)
def test_counts_are_whole_and_count_what_the_encoder_sits_on(gear, side, counts_a_turn):
    drive = PlantDrive(gear_ratio=gear, encoder_counts=1000.0, encoder_on=side, coulomb_friction=1.0)
    plant = Plant(one_joint(1e-3), "tip", [drive], gravity=WEIGHTLESS)
    (lap,) = plant.run(still(3, 1.2345), still(3), settle=0.0)
    assert lap.counts[0, 0] == round(1.2345 / (2.0 * math.pi) * counts_a_turn)


def test_torque_acts_after_the_delay():
    servo = PlantServo(delay=2e-3)
    plant = Plant(one_joint(1e-3), "tip", [PlantDrive(stiffness=1.0)], servo, gravity=WEIGHTLESS)
    step = np.array([[0.0], [0.0], [0.1], [0.1], [0.1], [0.1]])
    (lap,) = plant.run(step, still(6), settle=0.0)
    assert lap.torque[2, 0] == pytest.approx(0.1)
    assert lap.true_speed[4, 0] == 0.0
    assert lap.true_speed[5, 0] == pytest.approx(1e-3 * 0.1 / 1e-3)


def test_a_perfect_table_takes_the_cogging_away():
    harmonics = ((84, 0.018, 0.3), (14, 0.005, 1.1))
    angle = 2.0 * math.pi * np.arange(8192) / 8192
    table = sum(amplitude * np.sin(order * angle + phase) for order, amplitude, phase in harmonics)
    drive = PlantDrive(harmonics, index_offset=0.4, table=table, stiffness=1.5, damping=0.05, rotor_inertia=1e-3)
    plant = Plant(one_joint(1e-3), "tip", [drive], gravity=WEIGHTLESS)
    target = (0.2 * 1e-3 * np.arange(1500))[:, None]
    error = {}
    for compensated in (False, True):
        (lap,) = plant.run(target, np.full_like(target, 0.2), compensated=compensated)
        error[compensated] = np.ptp((lap.true_angle - target)[700:])  # the start has died away
    assert error[False] > 5e-3
    assert error[True] < 0.1 * error[False]


def test_the_drive_loses_its_dead_time_and_rounds_and_clips_the_command():
    drive = PlantDrive(stiffness=1.0, torque_limit=0.3, torque_step=0.02, dead_time_torque=0.05)
    plant = Plant(one_joint(1e-3), "tip", [drive], gravity=WEIGHTLESS)
    (lap,) = plant.run(still(2, 0.131), still(2), start=np.zeros(1), settle=0.0)
    assert lap.torque[0, 0] == pytest.approx(0.14)
    assert lap.true_speed[1, 0] == pytest.approx(1e-3 * (0.14 - 0.05) / 1e-3)
    (lap,) = plant.run(still(2, 9.0), still(2), start=np.zeros(1), settle=0.0)
    assert lap.torque[0, 0] == pytest.approx(0.3)


def test_a_trapezoid_arrives_in_the_time_it_says():
    long, short = 0.1, 0.002
    assert stretch_time(long, 0.06, 0.5) == pytest.approx(0.1 / 0.06 + 0.06 / 0.5)
    assert stretch_time(short, 0.06, 0.5) == pytest.approx(2.0 * math.sqrt(0.002 / 0.5))
    for length in (long, short):
        t = np.linspace(0.0, stretch_time(length, 0.06, 0.5), 2001)
        s = trapezoid(length, 0.06, 0.5, t)
        assert s[-1] == pytest.approx(length)
        assert np.gradient(s, t).max() <= 0.06 * (1 + 1e-9)
        assert np.abs(np.gradient(np.gradient(s, t), t)[2:-2]).max() <= 0.5 * (1 + 1e-6)


def test_true_rests_are_those_of_the_rule():
    speed = np.full((200, 2), 0.1)
    told = np.full((200, 2), 0.1)
    speed[20:40, 0] = 0.0019  # 20 ms below 2 % of the target's speed
    speed[60:79, 0] = 0.0  # 19 ms are too short
    speed[100:150, 1] = 0.0
    told[100:150, 1] = 0.019  # not told to move
    found = rests(np.zeros((200, 2)), speed, told, 1e-3)
    assert [(rest.joint, rest.first, rest.last) for rest in found] == [(0, 20, 39)]


def test_distance_to_the_path_looks_only_near_where_the_tip_should_be():
    path = np.array([[0.0, 0, 0], [0.1, 0, 0], [0.1, 0.01, 0], [0.0, 0.01, 0]])
    tip = np.array([[0.05, 0.008, 0.0]])
    assert distance_to_path(tip, np.array([0.05]), path, 0.02) == pytest.approx([0.008])
    assert distance_to_path(tip, np.array([0.16]), path, 0.02) == pytest.approx([0.002])

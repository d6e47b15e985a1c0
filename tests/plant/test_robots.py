"""What the notes of the three invented arms promise."""

import math
import re
import warnings

import numpy as np
import pytest

from armeval.errors import InputWarning
from armeval.evaluate.plan import plan
from armeval.files.arm_file import read_arm
from armeval.files.path_file import read_path
from tests.plant import make_starter_paths, robots, shipped
from tests.plant.planner import inverse_kinematics
from tests.plant.solids import box, cylinder, lumped, tube

ARMS = ("tern", "plover", "heron")


def arm(name):
    with warnings.catch_warnings():
        # two shipped maps were made in one direction only, which is told
        warnings.filterwarnings("ignore", message=".*only one turning direction", category=InputWarning)
        return read_arm(shipped.FOLDER / name / "arm.toml")


def test_lumped_solids_weigh_and_turn_as_the_textbook_says():
    mass, centre, inertia = lumped([box((0.2, 0.1, 0.0), 3.0, (0, 0, 0)), cylinder(0.1, 0.4, 2.0, (0.5, 0, 0), "x")])
    assert mass == 5.0
    assert centre == pytest.approx([0.2, 0.0, 0.0])
    assert inertia[0, 0] == pytest.approx(3.0 * 0.1**2 / 12 + 2.0 * 0.1**2 / 2)
    across = 2.0 * (3 * 0.1**2 + 0.4**2) / 12 + 2.0 * 0.3**2
    assert inertia[1, 1] == pytest.approx(3.0 * 0.2**2 / 12 + 3.0 * 0.2**2 + across)
    hollow = tube(0.006, 0.005, 0.19, 1600.0, (0, 0, 0))
    assert hollow.mass == pytest.approx(math.pi * (0.006**2 - 0.005**2) * 0.19 * 1600.0)
    assert hollow.inertia()[0, 0] == pytest.approx(hollow.mass * (0.006**2 + 0.005**2) / 2)


@pytest.mark.parametrize("name", ARMS)
def test_the_shipped_urdf_is_what_its_solids_give(name):
    assert shipped.urdf_text(name) == robots.ARMS[name]()


@pytest.mark.parametrize("name", ARMS)
def test_the_shipped_starter_path_is_what_its_script_gives(name):
    file = shipped.FOLDER / name / "starter_path.csv"
    assert file.read_text(encoding="utf-8") == make_starter_paths.text(name)


@pytest.mark.parametrize("name", ARMS)
def test_every_body_could_exist(name):
    chain = arm(name).chain
    assert (chain.mass > 0.0).all()
    for inertia in chain.inertia:
        smallest, middle, largest = np.linalg.eigvalsh(inertia)
        assert smallest > 0.0
        assert largest <= smallest + middle + 1e-12


@pytest.mark.parametrize("name", ARMS)
def test_the_motors_hold_the_arm_everywhere_with_half_of_their_torque(name):
    plant = shipped.plant(name)
    limits = np.array([drive.torque_limit for drive in plant.drives])
    lower, upper = plant.model.jnt_range.T
    poses = np.random.default_rng(5).uniform(lower, upper, (2000, plant.count))
    held = np.abs([plant.gravity_torque(pose) for pose in poses]).max(axis=0)
    assert (held < 0.5 * limits).all()


@pytest.mark.parametrize("name", ARMS)
def test_the_starter_path_is_some_three_tenths_of_a_metre_and_in_comfortable_reach(name):
    model = arm(name)
    path = read_path(
        shipped.FOLDER / name / "starter_path.csv", model.joints, [bool(slides) for slides in model.chain.prismatic]
    )
    trajectory = plan(model, path, feed=0.06, acceleration=1.0)
    assert trajectory.length == pytest.approx(0.3, rel=0.05)
    margin = math.radians(10.0)
    assert (trajectory.joint > model.chain.lower + margin).all()
    assert (trajectory.joint < model.chain.upper - margin).all()
    assert np.abs(trajectory.joint_speed).max() < 1.0


@pytest.mark.parametrize("name", ARMS)
def test_the_package_and_the_plant_agree_where_the_tip_is(name):
    model, plant = arm(name), shipped.plant(name)
    poses = np.random.default_rng(6).uniform(model.chain.lower, model.chain.upper, (50, plant.count))
    from armeval.kernels.chain import tip_positions

    assert tip_positions(model.chain.arrays, poses) == pytest.approx(plant.tip(poses), abs=1e-9)


@pytest.mark.parametrize("name", ARMS)
def test_the_package_and_the_plant_read_the_same_drives(name):
    for drive, known in zip(arm(name).drives, shipped.drives(name).values(), strict=True):
        for key in ("gear_ratio", "stiffness", "damping", "torque_limit", "rotor_inertia", "coulomb_friction"):
            assert getattr(drive, key) == pytest.approx(getattr(known, key)), (drive.joint, key)
        assert drive.resolution == pytest.approx(abs(known.resolution))
        assert drive.index_offset == pytest.approx(known.index_offset)


def test_inverse_kinematics_of_the_plant_puts_the_tip_where_it_should_be():
    plant = shipped.plant("tern")
    points = np.array([[0.25, 0.05, 0.03], [0.30, -0.10, 0.03]])
    angles = inverse_kinematics(plant, points, np.radians([0.0, 35.0, -90.0]))
    assert plant.tip(angles) == pytest.approx(points, abs=1e-9)


@pytest.mark.parametrize("name", ARMS)
def test_the_notes_say_that_all_is_invented(name):
    notes = (shipped.FOLDER / name / "NOTES.md").read_text(encoding="utf-8")
    assert "Invented, with invented motors" in notes


@pytest.mark.parametrize("name", ARMS)
def test_the_notes_give_the_cogging_that_the_maps_were_made_from(name):
    notes = (shipped.FOLDER / name / "NOTES.md").read_text(encoding="utf-8")
    header, rows = None, {}
    for line in notes.splitlines():
        cells = [cell.strip() for cell in line.strip("|").split("|")]
        if cells[0] == "joint":
            header = [int(cell) for cell in cells[1:]]
        elif header and cells[0] in shipped.MOTORS[name]:
            rows[cells[0]] = {
                order: float(cell) * 1e-3
                for order, cell in zip(header, cells[1:], strict=True)
                if re.fullmatch(r"[\d.]+", cell)
            }
    for joint, motor in shipped.MOTORS[name].items():
        assert rows[joint] == pytest.approx({order: amplitude for order, amplitude, _ in motor.harmonics}), joint

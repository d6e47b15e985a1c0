"""Read, write, read again: arms and trials come back as they were."""

from __future__ import annotations

import math
from dataclasses import fields, replace

import numpy as np
import pytest

from armeval.errors import InputError
from armeval.files.arm_file import read_arm
from armeval.files.arm_writer import arm_text, write_arm
from armeval.files.trial_file import read_trial
from armeval.files.trial_writer import write_trial
from armeval.model.arm import Arm
from armeval.model.cogmap import CogMap
from armeval.model.servo import Servo
from tests.files.samples import URDF, write_sample


def same(one: object, other: object, path: str = "") -> None:
    """Every field is equal to rounding; where a file stands is not compared."""
    if hasattr(one, "__dataclass_fields__"):
        assert type(one) is type(other), path
        for field in fields(one):
            if field.name not in ("source", "files"):
                same(getattr(one, field.name), getattr(other, field.name), f"{path}.{field.name}")
    elif isinstance(one, tuple):
        assert isinstance(other, tuple), path
        assert len(one) == len(other), path
        for index, (a, b) in enumerate(zip(one, other, strict=True)):
            same(a, b, f"{path}[{index}]")
    elif isinstance(one, np.ndarray):
        np.testing.assert_allclose(one, other, rtol=1e-15, atol=0, err_msg=path)
    elif isinstance(one, float) and isinstance(other, float):
        assert one == pytest.approx(other, rel=1e-15, abs=0), path
    else:
        assert one == other, path


def test_an_arm_is_the_same_after_writing_it_from_another_folder(tmp_path):
    write_sample(tmp_path / "a")
    arm = read_arm(tmp_path / "a" / "arm.toml")
    written = write_arm(arm, tmp_path / "b" / "deep" / "arm.toml", urdf=tmp_path / "a" / "pair.urdf")
    same(arm, read_arm(written))
    assert str(tmp_path) not in written.read_text(encoding="utf-8")


def test_what_is_not_told_stays_untold(tmp_path):
    write_sample(tmp_path)
    arm = read_arm(tmp_path / "arm.toml")
    bare = replace(
        arm,
        drives=tuple(
            replace(
                drive,
                cog_map=None,
                torque_limit=math.inf,
                torque_constant=None,
                winding_resistance=None,
                slots=None,
                poles=None,
                rest_angle=None,
                encoder_counts=0.0,
                index_offset=0.0,
            )
            for drive in arm.drives
        ),
        servo=replace(arm.servo, speed_cutoff=math.inf),
        gravity=np.zeros(3),
    )
    same(bare, read_arm(write_arm(bare, tmp_path / "bare.toml", urdf=tmp_path / "pair.urdf")))


def test_a_sliding_joint_and_a_tip_servo_come_back(tmp_path):
    write_sample(tmp_path)
    (tmp_path / "pair.urdf").write_text(URDF.replace('"elbow" type="revolute"', '"elbow" type="prismatic"'), "utf-8")
    text = (tmp_path / "arm.toml").read_text(encoding="utf-8")
    shoulder = text[: text.index("[joint.elbow]")]
    elbow = '[joint.elbow]\ngear_ratio = "3 rad/mm"\nencoder_on = "joint"\nencoder_counts = "100 count/mm"\nup = 1\n'
    (tmp_path / "arm.toml").write_text(shoulder + elbow.replace("up = 1\n", ""), encoding="utf-8")
    arm = read_arm(tmp_path / "arm.toml")
    tilted = Arm(
        "tilted",
        arm.chain,
        arm.drives,
        Servo("tip_impedance", 0.002, tip_stiffness=(1.0, 2.0, 1 / 3), tip_damping=(0.1, 0.2, 0.3)),
        np.array([1.0, 2.0, -9.0]),
    )
    same(tilted, read_arm(write_arm(tilted, tmp_path / "tilted.toml", urdf=tmp_path / "pair.urdf")))


def test_names_that_need_quotes_come_back(tmp_path):
    write_sample(tmp_path)
    name = 'a.b "c" \\ ü'
    (tmp_path / "pair.urdf").write_text(URDF.replace('"elbow"', "'a.b &quot;c&quot; \\ ü'"), encoding="utf-8")
    text = (tmp_path / "arm.toml").read_text(encoding="utf-8")
    (tmp_path / "arm.toml").write_text(text.replace("[joint.elbow]", "[joint.'a.b \"c\" \\ ü']"), encoding="utf-8")
    arm = read_arm(tmp_path / "arm.toml")
    assert arm.joints[1] == name
    same(arm, read_arm(write_arm(arm, tmp_path / "again.toml", urdf=tmp_path / "pair.urdf")))


def test_a_map_that_is_in_no_file_is_refused_with_the_joint(tmp_path):
    write_sample(tmp_path)
    arm = read_arm(tmp_path / "arm.toml")
    made = replace(arm.drives[0], cog_map=CogMap(np.sin(np.arange(16) * np.pi / 8)))
    with pytest.raises(InputError, match=r"`shoulder`.*write_cog_map"):
        arm_text(replace(arm, drives=(made, arm.drives[1])), urdf="pair.urdf", folder=tmp_path)


def test_a_trial_is_the_same_after_writing_it_from_another_folder(tmp_path):
    trial_file = write_sample(tmp_path / "a")
    trial = read_trial(trial_file)
    written = write_trial(trial, tmp_path / "b" / "trial.toml", arm=tmp_path / "a" / "arm.toml")
    same(trial, read_trial(written))


def test_a_trial_in_memory_only_cannot_be_written(tmp_path):
    trial = read_trial(write_sample(tmp_path))
    with pytest.raises(InputError, match="write_path"):
        write_trial(replace(trial, path=replace(trial.path, source="")), tmp_path / "t.toml", arm=tmp_path / "arm.toml")
    lap = replace(trial.runs[0].laps[0], source="")
    with pytest.raises(InputError, match=r"`bare`.*write_joint_log"):
        write_trial(
            replace(trial, runs=(replace(trial.runs[0], laps=(lap,)),)), tmp_path / "t.toml", arm=tmp_path / "arm.toml"
        )
    assert not (tmp_path / "t.toml").exists()

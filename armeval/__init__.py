"""From joint-level cogging to the tip of the arm.

Files in, answers out::

    trial = armeval.read_trial("trial.toml")
    armeval.measure(trial).to_frame()

Every name below is imported when it is first used, so that ``import armeval`` costs nothing.
"""

from __future__ import annotations

import importlib
from typing import TYPE_CHECKING

from armeval._version import __version__
from armeval.errors import Finding, InputError, InputWarning

if TYPE_CHECKING:
    from armeval.evaluate.cog_report import CogReport, cog_report
    from armeval.evaluate.compare import Comparison, compare
    from armeval.evaluate.locate import Location, locate
    from armeval.evaluate.locate_trial import locate_trial
    from armeval.evaluate.measure import Measurement, measure
    from armeval.evaluate.plan import plan, plan_trial
    from armeval.evaluate.predict import Prediction, predict
    from armeval.evaluate.quasistatic import quasistatic
    from armeval.evaluate.replay import Replay, replay
    from armeval.evaluate.sticking_ratio import StickingRatio, sticking_ratio
    from armeval.files.arm_file import read_arm
    from armeval.files.arm_writer import write_arm
    from armeval.files.check import CheckResult, check
    from armeval.files.cog_map_file import read_cog_map, write_cog_map
    from armeval.files.demo import write_demo
    from armeval.files.log_file import read_joint_log, write_joint_log
    from armeval.files.new_trial import new_trial, robot_folder, robot_names
    from armeval.files.path_file import read_path, write_path
    from armeval.files.trial_file import read_trial
    from armeval.files.trial_writer import write_trial
    from armeval.model.arm import Arm
    from armeval.model.cogmap import CogMap
    from armeval.model.joint_log import JointLog
    from armeval.model.planned_path import PlannedPath
    from armeval.model.trajectory import Trajectory
    from armeval.model.trial import Compensation, Run, StickingRule, Trial
    from armeval.report import write_report

_HOMES = {
    "armeval.evaluate.cog_report": ("CogReport", "cog_report"),
    "armeval.evaluate.compare": ("Comparison", "compare"),
    "armeval.evaluate.locate": ("Location", "locate"),
    "armeval.evaluate.locate_trial": ("locate_trial",),
    "armeval.evaluate.measure": ("Measurement", "measure"),
    "armeval.evaluate.plan": ("plan", "plan_trial"),
    "armeval.evaluate.predict": ("Prediction", "predict"),
    "armeval.evaluate.quasistatic": ("quasistatic",),
    "armeval.evaluate.replay": ("Replay", "replay"),
    "armeval.evaluate.sticking_ratio": ("StickingRatio", "sticking_ratio"),
    "armeval.files.arm_file": ("read_arm",),
    "armeval.files.arm_writer": ("write_arm",),
    "armeval.files.check": ("CheckResult", "check"),
    "armeval.files.cog_map_file": ("read_cog_map", "write_cog_map"),
    "armeval.files.demo": ("write_demo",),
    "armeval.files.log_file": ("read_joint_log", "write_joint_log"),
    "armeval.files.new_trial": ("new_trial", "robot_folder", "robot_names"),
    "armeval.files.path_file": ("read_path", "write_path"),
    "armeval.files.trial_file": ("read_trial",),
    "armeval.files.trial_writer": ("write_trial",),
    "armeval.model.arm": ("Arm",),
    "armeval.model.cogmap": ("CogMap",),
    "armeval.model.joint_log": ("JointLog",),
    "armeval.model.planned_path": ("PlannedPath",),
    "armeval.model.trajectory": ("Trajectory",),
    "armeval.model.trial": ("Compensation", "Run", "StickingRule", "Trial"),
    "armeval.report": ("write_report",),
}
_HOME_OF = {name: module for module, names in _HOMES.items() for name in names}

__all__ = ["Finding", "InputError", "InputWarning", "__version__", *sorted(_HOME_OF)]  # noqa: PLE0604


def __getattr__(name: str) -> object:
    if name not in _HOME_OF:
        raise AttributeError(f"module 'armeval' has no attribute {name!r}")
    return getattr(importlib.import_module(_HOME_OF[name]), name)


def __dir__() -> list[str]:
    return sorted({*globals(), *_HOME_OF})

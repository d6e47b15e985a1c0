# What `import armeval` gives; each name is imported when it is first used.

from ._version import __version__
from .errors import Finding, InputError, InputWarning
from .evaluate.budget import Budget, budget
from .evaluate.cog_report import CogReport, cog_report
from .evaluate.compare import Comparison, compare
from .evaluate.feel import Feel, feel
from .evaluate.feeling.workspace import WorkspaceMap, workspace_map
from .evaluate.locate import Location, locate
from .evaluate.locate_trial import locate_trial
from .evaluate.measure import Measurement, measure
from .evaluate.plan import plan, plan_trial
from .evaluate.predict import Prediction, predict
from .evaluate.replaying.ensemble import Ensemble, ensemble
from .evaluate.replaying.quasistatic import quasistatic
from .evaluate.replaying.replay import Replay, replay
from .evaluate.replaying.sticking_ratio import StickingRatio, sticking_ratio
from .files.arm_file import read_arm
from .files.arm_writer import write_arm
from .files.check import CheckResult, check
from .files.cog_map_file import read_cog_map, write_cog_map
from .files.demo import write_demo
from .files.joint_logs.log_file import read_joint_log, write_joint_log
from .files.new_trial import new_trial, robot_folder, robot_names
from .files.path_file import read_path, write_path
from .files.thresholds_file import read_thresholds
from .files.trial_file import read_trial
from .files.trial_writer import write_trial
from .model.arm import Arm
from .model.cogmap import CogMap
from .model.hand import Hand
from .model.joint_log import JointLog
from .model.planned_path import PlannedPath
from .model.spreads import Spreads
from .model.thresholds import Thresholds
from .model.trajectory import Trajectory
from .model.trial import Compensation, Run, StickingRule, Trial
from .report import write_report

__all__ = [
    "Arm",
    "Budget",
    "CheckResult",
    "CogMap",
    "CogReport",
    "Comparison",
    "Compensation",
    "Ensemble",
    "Feel",
    "Finding",
    "Hand",
    "InputError",
    "InputWarning",
    "JointLog",
    "Location",
    "Measurement",
    "PlannedPath",
    "Prediction",
    "Replay",
    "Run",
    "Spreads",
    "StickingRatio",
    "StickingRule",
    "Thresholds",
    "Trajectory",
    "Trial",
    "WorkspaceMap",
    "__version__",
    "budget",
    "check",
    "cog_report",
    "compare",
    "ensemble",
    "feel",
    "locate",
    "locate_trial",
    "measure",
    "new_trial",
    "plan",
    "plan_trial",
    "predict",
    "quasistatic",
    "read_arm",
    "read_cog_map",
    "read_joint_log",
    "read_path",
    "read_thresholds",
    "read_trial",
    "replay",
    "robot_folder",
    "robot_names",
    "sticking_ratio",
    "workspace_map",
    "write_arm",
    "write_cog_map",
    "write_demo",
    "write_joint_log",
    "write_path",
    "write_report",
    "write_trial",
]

# The figures of the report, for use on axes of one's own.

from .along_path import along_path_plot, band_plot
from .budget import budget_plot
from .cog_map import cog_map_plot, cog_orders_plot
from .error_orders import error_orders_plot
from .event import event_angle_plot, event_torque_plot
from .feel_force import feel_band_plot, feel_force_plot
from .feel_polar import feel_polar_plot
from .feel_spectrum import feel_spectrum_plot
from .feel_workspace import feel_workspace_plot
from .path import mark_stretch, path_plot
from .pose import pose_plot
from .sticking import joint_strip, region_lanes
from .style import quiet_style
from .summary import summary_plot

__all__ = [
    "along_path_plot",
    "band_plot",
    "budget_plot",
    "cog_map_plot",
    "cog_orders_plot",
    "error_orders_plot",
    "event_angle_plot",
    "event_torque_plot",
    "feel_band_plot",
    "feel_force_plot",
    "feel_polar_plot",
    "feel_spectrum_plot",
    "feel_workspace_plot",
    "joint_strip",
    "mark_stretch",
    "path_plot",
    "pose_plot",
    "quiet_style",
    "region_lanes",
    "summary_plot",
]

"""What is no fault in any one file, and yet not what a person is likely to mean."""

from __future__ import annotations

import math

import numpy as np

from armeval.errors import Findings
from armeval.model.arm import Arm
from armeval.model.chain import Chain
from armeval.model.drive import Drive
from armeval.model.servo import Servo
from armeval.model.trial import Trial
from armeval.units import angle_text, length_text


def doubt_arm(arm: Arm, findings: Findings) -> None:
    """Note as warnings what an arm lacks for a prediction to be worth believing."""
    for drive, slides in zip(arm.drives, arm.chain.prismatic, strict=True):
        _doubt_drive(drive, arm.servo, bool(slides), findings)


def _doubt_drive(drive: Drive, servo: Servo, slides: bool, findings: Findings) -> None:
    def warn(key: str, what: str, mend: str) -> None:
        findings.warning(what, mend, place=f"[joint.{drive.joint}] {key}")

    torque, per_angle = ("N", "N/m") if slides else ("N*m", "N*m/rad")
    if servo.law == "joint_pd":
        if drive.stiffness == 0.0:
            warn("stiffness", "the servo does not hold this joint", f'add such as `stiffness = "1.5 {per_angle}"`')
        elif drive.damping == 0.0:
            warn("damping", "the servo does not damp this joint", "add `damping`")
    elif drive.stiffness > 0.0 or drive.damping > 0.0:
        warn("stiffness", f"law `{servo.law}` does not use a joint's stiffness and damping", "take them out")
    if drive.coulomb_friction == 0.0 and drive.breakaway_friction == 0.0:
        mend = "add `coulomb_friction`, or measure the cog map in both directions"
        warn("coulomb_friction", "no friction is known: the joint will seem freer than it is", mend)
    if math.isinf(drive.torque_limit):
        mend = f'add such as `torque_limit = "0.3 {torque}"`'
        warn("torque_limit", "no torque limit: the drive will seem stronger than it is", mend)
    if (drive.slots is None) != (drive.poles is None):
        warn("slots", "only one of `slots` and `poles` is given", "give both, or none")
    if drive.encoder_counts == 0.0:
        warn("encoder_counts", "no encoder counts: the encoder will seem perfect", "add `encoder_counts`")


def doubt_trial(trial: Trial, findings: Findings) -> None:
    """Note what does not go together in a trial: as warnings, and as errors where it cannot be carried out."""
    compensated = [run.name for run in trial.runs if run.compensated]
    if compensated:
        for drive in trial.arm.drives:
            _doubt_compensation(drive, trial, compensated[0], findings)
        if len(compensated) == len(trial.runs):
            findings.warning(
                "every run is compensated: there is nothing to compare them with",
                "add a run with `compensated = false`",
                place="[[run]]",
            )
    _doubt_reach(trial, findings)


def _doubt_compensation(drive: Drive, trial: Trial, run: str, findings: Findings) -> None:
    if drive.cog_map is None:
        findings.warning(
            f"the run `{run}` is compensated, but this joint has no cog map",
            "add `cog_map`",
            place=f"joint `{drive.joint}`",
        )
    bins = trial.compensation.table_bins
    if drive.slots and drive.poles:
        order = math.lcm(drive.slots, drive.poles)
        if bins <= 2 * order:
            findings.warning(
                f"{bins} entries a turn cannot hold the order {order} of joint `{drive.joint}`",
                f"give more than {2 * order}; ten times the order keep most of it",
                place="[compensation] table_bins",
            )


def _doubt_reach(trial: Trial, findings: Findings) -> None:
    """Note points that the arm cannot reach however it turns, and joint targets beyond the joints' ranges."""
    chain, path = trial.arm.chain, trial.path
    if path.space == "joint":
        for index, joint in enumerate(chain.joints):
            targets = path.points[:, index]
            beyond = np.flatnonzero((targets < chain.lower[index]) | (targets > chain.upper[index]))
            if len(beyond):
                told = length_text if chain.prismatic[index] else angle_text
                findings.error(
                    f"{told(float(targets[beyond[0]]))} is beyond the range of joint `{joint}`, "
                    f"{told(float(chain.lower[index]))} to {told(float(chain.upper[index]))}",
                    "keep the targets within it",
                    file=path.source,
                    place=f"point {beyond[0] + 1}",
                )
        return
    center, reach = _sphere(chain)
    distance = np.linalg.norm(path.points - center, axis=1)
    beyond = np.flatnonzero(distance > reach * (1.0 + 1e-9))
    if len(beyond):
        first = int(beyond[0])
        findings.error(
            f"{len(beyond)} of {len(distance)} points lie out of reach, this one by at least "
            f"{length_text(float(distance[first] - reach))}",
            f"keep the path within {length_text(reach)} of ({', '.join(length_text(float(c)) for c in center)})",
            file=path.source,
            place=f"point {first + 1}",
        )


def _sphere(chain: Chain) -> tuple[np.ndarray, float]:
    """Centre (3,) and radius [m] of a sphere about the first joint that the tip cannot leave.

    The radius is the length of the chain stretched out, each sliding joint at the far end of its range.
    """
    slide = np.where(chain.prismatic, np.maximum(np.abs(chain.lower), np.abs(chain.upper)), 0.0)
    links = np.linalg.norm(chain.placement[1:, :, 3], axis=1).sum()
    return chain.placement[0, :, 3], float(links + np.linalg.norm(chain.tip) + slide.sum())

"""What matters of replayed laps, eight at a time: tips, tracking error and sticking along the path."""

from __future__ import annotations

from armeval.arrays import IntArray
from armeval.kernels.compile import jit
from armeval.kernels.dynamics import place
from armeval.kernels.lanes import where, with_lanes
from armeval.kernels.records import Records, joint_count


@jit
def survey_laps(
    joint_records: Records,
    servo_records: Records,
    targets: Records,
    lap_records: Records,
    bin_of: IntArray,
    least_target_speed: float,
    speed_share: float,
    least_periods: float,
    bin_records: Records,
) -> None:
    """Sum up the laps that :func:`armeval.kernels.replay.replay_lap` filled in.

    Parameters
    ----------
    joint_records, servo_records, targets, lap_records
        As they came out of the replay; ``targets`` without the periods of settling. Fills in ``tip`` of the laps, and
        uses ``rests`` to count periods of rest.
    bin_of
        Shape (k,). The stretch of path in which each period's target lies.
    least_target_speed, speed_share, least_periods
        When a joint counts as sticking, as in :class:`armeval.model.trial.StickingRule`.
    bin_records
        Shape (bins,), zeros: ``square``, the sum of squared tracking errors [m^2], and ``sticks`` (n,), 1 where the
        joint sticks, are filled in.
    """
    joints, lap, bins = with_lanes(joint_records), with_lanes(lap_records), with_lanes(bin_records)
    n, last = joint_count(joints), lap.shape[0] - 1
    offset = servo_records[0]["tip"]
    for k in range(last + 1):
        row, target = lap[k], targets[k]
        for i in range(n):
            joints[i]["at"] = row["angle"][i]
        place(joints)
        R, p, tip, wanted = joints[n - 1]["rotation"], joints[n - 1]["origin"], row["tip"], target["tip"]
        square = 0.0 * p[0]
        for r in range(3):
            tip[r] = p[r] + R[r, 0] * offset[0] + R[r, 1] * offset[1] + R[r, 2] * offset[2]
            square = square + (tip[r] - wanted[r]) * (tip[r] - wanted[r])
        bins[bin_of[k]]["square"] += square
        for i in range(n):
            told = abs(target["joint_speed"][i])
            slow = abs(row["speed"][i]) < speed_share * told
            before = lap[k - 1]["rests"][i] if k > 0 else 0.0 * square
            row["rests"][i] = where(slow, before + 1.0, 0.0) if told >= least_target_speed else 0.0 * square
    for i in range(n):
        sticks = 0.0 * lap[0]["rests"][i]
        for k in range(last, -1, -1):
            # a rest counts from its first period on, once it has become long enough
            rests = lap[k]["rests"][i]
            sticks = where(rests == 0.0, 0.0, where(rests >= least_periods, 1.0, sticks))
            stretch = bins[bin_of[k]]["sticks"]
            stretch[i] = where(sticks > 0.0, 1.0, stretch[i])

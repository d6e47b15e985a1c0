"""The plant's firmware: from noisy, rounded encoder counts to delayed, clipped and rounded torques."""

from __future__ import annotations

import math
from collections import deque
from typing import TYPE_CHECKING

import numpy as np
import numpy.typing as npt

if TYPE_CHECKING:
    from tests.plant.mujoco_plant import Plant

FloatArray = npt.NDArray[np.float64]


class Firmware:
    """What runs in the drives once a period: it knows encoder counts, targets, its table and its model of the arm."""

    def __init__(self, plant: Plant, compensated: bool, rng: np.random.Generator) -> None:
        drives, servo, n = plant.drives, plant.servo, plant.count
        self.plant, self.servo, self.rng = plant, servo, rng
        self.compensated = compensated and any(drive.table is not None for drive in drives)
        self.resolution = np.array([drive.resolution for drive in drives])
        self.ideal = np.array([drive.encoder_counts == 0.0 for drive in drives])
        self.jitter = np.array([drive.encoder_jitter for drive in drives])
        self.stiffness = np.array([drive.stiffness for drive in drives])
        self.damping = np.array([drive.damping for drive in drives])
        self.limit = np.array([drive.torque_limit for drive in drives])
        self.quantum = np.array([drive.torque_step for drive in drives])
        self.dead = np.array([drive.dead_time_torque for drive in drives])
        self.blend = -math.expm1(-2.0 * math.pi * servo.speed_cutoff * servo.period)
        self.seen: FloatArray | None = None
        self.speed = np.zeros(n)
        # Torques on their way from the loop to the motor, one a plant step; the last one is held.
        self.delay = round(servo.delay / servo.period * plant.substeps)
        self.queue: deque[FloatArray] = deque()
        self.newest = np.zeros(n)

    def answer(
        self, q: FloatArray, target: FloatArray, target_speed: FloatArray, target_acceleration: FloatArray
    ) -> tuple[FloatArray, FloatArray]:
        """Read the encoders at the true angles ``q`` and command torques; both of shape (n,)."""
        reading = q / self.resolution + self.jitter * self.rng.standard_normal(len(q))
        counts = np.where(self.ideal, reading, np.rint(reading))
        seen = counts * self.resolution
        first = self.seen is None
        last = seen if self.seen is None else self.seen
        self.speed = self.speed + self.blend * ((seen - last) / self.servo.period - self.speed)
        self.seen = seen
        if self.servo.law == "joint_pd":
            torque = self.stiffness * (target - seen) + self.damping * (target_speed - self.speed)
        else:
            torque = self._tip_impedance(seen, target, target_speed)
        if self.servo.gravity_feedforward:
            torque = torque + self.plant.gravity_torque(seen)
        if self.servo.inertia_feedforward:
            torque = torque + self.plant.inertia_torque(target, target_acceleration)
        if self.compensated:
            torque = torque - self._table(seen)
        torque = np.clip(torque, -self.limit, self.limit)
        stepped = np.where(self.quantum > 0.0, self.quantum, 1.0)
        torque = np.where(self.quantum > 0.0, np.rint(torque / stepped) * stepped, torque)
        self.newest = np.sign(torque) * np.maximum(np.abs(torque) - self.dead, 0.0)
        if first:  # as if it had held the arm there before
            self.queue.extend([self.newest] * self.delay)
        return counts, torque

    def _tip_impedance(self, seen: FloatArray, target: FloatArray, target_speed: FloatArray) -> FloatArray:
        wanted, wanted_speed = self.plant.tip(target)[0], self.plant.jacobian(target) @ target_speed
        jacobian = self.plant.jacobian(seen)
        error, error_speed = wanted - self.plant.tip(seen)[0], wanted_speed - jacobian @ self.speed
        stiffness, damping = np.array(self.servo.tip_stiffness), np.array(self.servo.tip_damping)
        return jacobian.T @ (stiffness * error + damping * error_speed)

    def _table(self, seen: FloatArray) -> FloatArray:
        """Joint torque of the stored table at the angle seen, linear between entries."""
        torque = np.zeros(len(seen))
        for j, drive in enumerate(self.plant.drives):
            if drive.table is not None:
                offset = drive.index_offset if drive.table_offset is None else drive.table_offset
                bins = len(drive.table)
                place = (drive.gear_ratio * seen[j] + offset) / (2.0 * math.pi) * bins
                below = math.floor(place)
                part = place - below
                low, high = drive.table[below % bins], drive.table[(below + 1) % bins]
                torque[j] = drive.gear_ratio * ((1.0 - part) * low + part * high)
        return torque

    def drive_torque(self) -> FloatArray:
        """Torque at the joints during the next plant step."""
        if self.delay == 0:
            return self.newest
        self.queue.append(self.newest)
        return self.queue.popleft()

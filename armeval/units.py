"""The only home of unit conversion: text with a unit to SI float64, and SI to what people read.

Inside the program everything is SI and radians. ``pint`` is imported when the first unit is read.
"""

from __future__ import annotations

import math
import re
from functools import cache, lru_cache
from typing import TYPE_CHECKING, cast

from armeval.errors import InputError

if TYPE_CHECKING:
    from pint import UnitRegistry

_HEADER = re.compile(r"^\s*(?P<name>[^\[\]]*?)\s*(?:\[(?P<unit>[^\[\]]*)\])?\s*$")
_NUMBER = re.compile(r"^\s*(?P<value>[+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?)\s*(?P<unit>.*?)\s*$")


@cache
def _registry() -> UnitRegistry[float]:
    import pint

    return pint.UnitRegistry(cache_folder=None)


@lru_cache(maxsize=512)
def _root(unit: str) -> tuple[float, dict[str, float], float]:
    """Factor to root units, exponents of the root units without radian, and radian's exponent."""
    try:
        quantity = _registry().Quantity(1.0, _registry().parse_units(unit)).to_base_units()
    except Exception as fault:  # pint raises a dozen kinds; every one of them means "not a unit"
        raise InputError(f"`{unit}` is not a unit", "write a unit such as `mm`, `deg`, `N*m`, `rad/s`") from fault
    powers = {str(name): cast(float, power) for name, power in quantity.unit_items()}
    radians = powers.pop("radian", 0.0)
    return quantity.magnitude, powers, radians


def scale(unit: str, wanted: str) -> float:
    """Factor that turns a number in ``unit`` into one in the SI unit ``wanted``.

    A turn is not a cycle: ``Hz`` does not pass for ``rad/s`` nor ``rpm`` for ``Hz``. A missing ``/rad`` is read
    into torque per angle (``N*m`` passes for ``N*m/rad``).

    Raises
    ------
    InputError
        If ``unit`` is unknown or measures something else than ``wanted``.
    """
    factor, powers, radians = _root(unit)
    wanted_factor, wanted_powers, wanted_radians = _root(wanted)
    same_angle = radians == wanted_radians or (radians == 0.0 and wanted_radians < 0.0)
    if powers != wanted_powers or not same_angle:
        raise InputError(f"`{unit}` does not measure what is due here", f"give it in `{wanted}` or a multiple of it")
    return factor / wanted_factor


def quantity(text: object, wanted: str) -> float:
    """Read ``"60 mm/s"`` as a number in the SI unit ``wanted``.

    Raises
    ------
    InputError
        If it is a bare number, not a finite number, or in a unit of another kind.
    """
    if isinstance(text, bool) or not isinstance(text, str):
        if isinstance(text, int | float):
            raise InputError(f"{text!r} has no unit", f'write it with its unit, such as "{text} {wanted}"')
        raise InputError(f"{text!r} is not a quantity", f'write a number with its unit, such as "1 {wanted}"')
    match = _NUMBER.match(text)
    if match is None:
        raise InputError(f'"{text}" is not a number with a unit', f'write it such as "1 {wanted}"')
    if not match["unit"]:
        raise InputError(f'"{text}" has no unit', f'write it with its unit, such as "{text.strip()} {wanted}"')
    value = float(match["value"]) * scale(match["unit"], wanted)
    if not math.isfinite(value):
        raise InputError(f'"{text}" is not finite', "give a finite value")
    return value


def header(text: str) -> tuple[str, str | None]:
    """Split a column header such as ``lift.angle [deg]`` into its name and its unit (``None`` if it has none).

    Raises
    ------
    InputError
        If the brackets do not match.
    """
    match = _HEADER.match(text)
    if match is None:
        raise InputError(f"the header `{text}` cannot be read", "write `name [unit]`")
    unit = match["unit"]
    return match["name"], unit.strip() if unit is not None else None


def significant(value: float, digits: int = 3) -> str:
    """Write a number with so many significant digits and no exponent in the usual range: 0.0312, 4.13, 84."""
    if value == 0.0 or not math.isfinite(value):
        return "0" if value == 0.0 else str(value)
    exponent = math.floor(math.log10(abs(value)))
    if not -4 <= exponent < 7:
        return f"{value:.{digits - 1}e}"
    return f"{value:.{max(0, digits - 1 - exponent)}f}"


def length_text(metres: float, digits: int = 3) -> str:
    """Write a small length in millimetres: ``4.13 mm``."""
    return f"{significant(1e3 * metres, digits)} mm"


def angle_text(radians: float, digits: int = 3) -> str:
    """Write an angle in degrees: ``12.5 deg``."""
    return f"{significant(math.degrees(radians), digits)} deg"


def torque_text(newton_metres: float, digits: int = 3) -> str:
    """Write a small torque in millinewton metres: ``18.2 mN·m``."""
    return f"{significant(1e3 * newton_metres, digits)} mN·m"


def time_text(seconds: float, digits: int = 3) -> str:
    """Write a time: ``35.0 ms`` below a second, ``1.20 s`` from there."""
    if abs(seconds) < 1.0:
        return f"{significant(1e3 * seconds, digits)} ms"
    return f"{significant(seconds, digits)} s"

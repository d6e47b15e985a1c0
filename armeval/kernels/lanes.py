"""Numbers with lanes: eight members of an ensemble computed at once, by the same source as a single one.

A kernel is written for plain numbers. Compiled for float64 it replays one member; compiled for :class:`Lanes` every
number in it is a vector of eight, one entry a member, and every operation on it one or two vector instructions. Where
plain code would branch on such a number, it says :func:`where`; where it would take an entry of a table,
:func:`take` or :func:`take_own`. Uncompiled, the same source runs on floats or on numpy rows of eight.

This module teaches the compiler the type: what an operation on it means in LLVM's vector instructions.
"""

# mypy: disable-error-code="untyped-decorator, no-any-return, arg-type, misc"
# ruff: noqa: ARG001, ARG002  (numba calls these functions with all it knows)

from __future__ import annotations

import operator
from typing import Any

import numpy as np
from llvmlite import ir
from numba.core import cgutils, types
from numba.core.imputils import impl_ret_borrowed
from numba.core.typeconv import Conversion
from numba.core.typing import signature
from numba.extending import intrinsic, lower_builtin, lower_cast, models, overload, register_model, type_callable

WIDTH = 8
MARK = "lanes"
"""Name of a field that only records with lanes have."""

_DOUBLES = ir.VectorType(ir.DoubleType(), WIDTH)
_BITS = ir.VectorType(ir.IntType(1), WIDTH)


class Lanes(types.Type):
    """Eight float64, side by side."""

    bitwidth = 64 * WIDTH

    def __init__(self) -> None:
        super().__init__(f"lanes{WIDTH}")

    def can_convert_from(self, typingctx: Any, other: Any) -> Any:
        """Let a plain number stand for eight equal ones."""
        return Conversion.safe if isinstance(other, types.Number) else None


class LaneMask(types.Type):
    """Eight truth values, side by side."""

    def __init__(self) -> None:
        super().__init__(f"lanemask{WIDTH}")


lanes, lane_mask = Lanes(), LaneMask()


@register_model(Lanes)
class _LanesModel(models.PrimitiveModel):
    def __init__(self, manager: Any, fe_type: Any) -> None:
        super().__init__(manager, fe_type, _DOUBLES)


@register_model(LaneMask)
class _LaneMaskModel(models.PrimitiveModel):
    def __init__(self, manager: Any, fe_type: Any) -> None:
        super().__init__(manager, fe_type, _BITS)


def _splat(builder: Any, value: Any) -> Any:
    """Fill all lanes with one double."""
    one = builder.insert_element(ir.Constant(_DOUBLES, ir.Undefined), value, ir.Constant(ir.IntType(32), 0))
    zeros = ir.Constant(ir.VectorType(ir.IntType(32), WIDTH), None)
    return builder.shuffle_vector(one, ir.Constant(_DOUBLES, ir.Undefined), zeros)


@lower_cast(types.Number, Lanes)
def _number_to_lanes(context: Any, builder: Any, fromty: Any, toty: Any, value: Any) -> Any:
    return _splat(builder, context.cast(builder, value, fromty, types.float64))


def _some_lanes(*given: Any) -> bool:
    """Whether all are numbers and at least one has lanes."""
    numbers = all(isinstance(t, (Lanes, types.Float, types.Integer)) for t in given)
    return numbers and any(isinstance(t, Lanes) for t in given)


def _operator(function: Any, taken: types.Type, given: types.Type, emit: Any) -> None:
    """Teach the compiler a binary operator that takes ``taken`` twice and gives ``given``."""

    @type_callable(function)
    def typing(context: Any) -> Any:
        def typed(a: Any, b: Any) -> Any:
            fits = _some_lanes(a, b) if taken is lanes else isinstance(a, LaneMask) and isinstance(b, LaneMask)
            return signature(given, taken, taken) if fits else None

        return typed

    @lower_builtin(function, type(taken), type(taken))
    def lower(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        return emit(builder, *args)


def _unary(function: Any, taken: types.Type, emit: Any) -> None:
    """Teach the compiler a function of one argument that gives what it takes."""

    @type_callable(function)
    def typing(context: Any) -> Any:
        return lambda a: signature(taken, taken) if isinstance(a, type(taken)) else None

    @lower_builtin(function, type(taken))
    def lower(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        return emit(builder, *args)


def _comparison(sign: str) -> Any:
    ordered = sign != "!="  # a comparison with a NaN is false, but a NaN differs from everything
    return lambda b, x, y: b.fcmp_ordered(sign, x, y) if ordered else b.fcmp_unordered(sign, x, y)


def _intrinsic(name: str) -> Any:
    def emit(builder: Any, value: Any) -> Any:
        function = cgutils.get_or_insert_function(
            builder.module, ir.FunctionType(_DOUBLES, [_DOUBLES]), f"llvm.{name}.v{WIDTH}f64"
        )
        return builder.call(function, [value])

    return emit


for _functions, _emit in {
    (operator.add, operator.iadd): lambda b, x, y: b.fadd(x, y),
    (operator.sub, operator.isub): lambda b, x, y: b.fsub(x, y),
    (operator.mul, operator.imul): lambda b, x, y: b.fmul(x, y),
    (operator.truediv, operator.itruediv): lambda b, x, y: b.fdiv(x, y),
}.items():
    for _function in _functions:
        _operator(_function, lanes, lanes, _emit)
for _function, _sign in {
    operator.lt: "<",
    operator.le: "<=",
    operator.gt: ">",
    operator.ge: ">=",
    operator.eq: "==",
    operator.ne: "!=",
}.items():
    _operator(_function, lanes, lane_mask, _comparison(_sign))
_operator(operator.and_, lane_mask, lane_mask, lambda b, x, y: b.and_(x, y))
_operator(operator.or_, lane_mask, lane_mask, lambda b, x, y: b.or_(x, y))
_unary(operator.neg, lanes, lambda b, x: b.fsub(ir.Constant(_DOUBLES, [-0.0] * WIDTH), x))
_unary(abs, lanes, _intrinsic("fabs"))
_unary(np.floor, lanes, _intrinsic("floor"))
_unary(np.rint, lanes, _intrinsic("rint"))


@intrinsic
def _select(typingctx: Any, condition: Any, a: Any, b: Any) -> Any:
    def emit(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        return builder.select(*args)

    return lanes(lane_mask, lanes, lanes), emit


@intrinsic
def _any(typingctx: Any, condition: Any) -> Any:
    def emit(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        bits = builder.bitcast(args[0], ir.IntType(WIDTH))
        return builder.icmp_unsigned("!=", bits, ir.Constant(ir.IntType(WIDTH), 0))

    return types.boolean(lane_mask), emit


@intrinsic
def _get(typingctx: Any, value: Any, lane: Any) -> Any:
    def emit(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        return builder.extract_element(args[0], builder.trunc(args[1], ir.IntType(32)))

    return types.float64(lanes, types.intp), emit


@intrinsic
def _with(typingctx: Any, value: Any, lane: Any, entry: Any) -> Any:
    def emit(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        return builder.insert_element(args[0], args[2], builder.trunc(args[1], ir.IntType(32)))

    return lanes(lanes, types.intp, types.float64), emit


def where(condition: Any, a: Any, b: Any) -> Any:
    """Choose ``a`` where the condition holds, else ``b``; both are computed."""
    return np.where(condition, a, b)[()]


@overload(where)
def _where(condition: Any, a: Any, b: Any) -> Any:
    def lane_by_lane(condition: Any, a: Any, b: Any) -> Any:
        return _select(condition, a, b)

    def plain(condition: Any, a: Any, b: Any) -> Any:
        return a if condition else b

    return lane_by_lane if isinstance(condition, LaneMask) else plain


def anywhere(condition: Any) -> bool:
    """Whether the condition holds in any lane."""
    return bool(np.any(condition))


@overload(anywhere)
def _anywhere(condition: Any) -> Any:
    def any_lane(condition: Any) -> bool:
        return _any(condition)

    def plain(condition: Any) -> bool:
        return condition

    return any_lane if isinstance(condition, LaneMask) else plain


def take(tables: Any, row: int, column: int, entry: Any) -> Any:
    """Take ``tables[row, column, entry]``; ``entry`` is a whole number, kept as a float, within the table."""
    return tables[row, column, np.asarray(entry).astype(np.int64)]


@overload(take)
def _take(tables: Any, row: int, column: int, entry: Any) -> Any:
    def eight(tables: Any, row: int, column: int, entry: Any) -> Any:
        taken = entry
        for lane in range(WIDTH):
            taken = _with(taken, lane, tables[row, column, np.uint64(_get(entry, lane))])
        return taken

    def plain(tables: Any, row: int, column: int, entry: Any) -> Any:
        return tables[row, column, np.uint64(entry)]

    return eight if isinstance(entry, Lanes) else plain


def take_own(tables: Any, row: int, entry: Any) -> Any:
    """Take ``tables[row, lane, entry]`` in each lane; with one lane ``tables[row, 0, entry]``."""
    place = np.asarray(entry).astype(np.int64)
    return tables[row, 0, place] if place.ndim == 0 else tables[row, np.arange(len(place)), place]


@overload(take_own)
def _take_own(tables: Any, row: int, entry: Any) -> Any:
    def eight(tables: Any, row: int, entry: Any) -> Any:
        taken = entry
        for lane in range(WIDTH):
            taken = _with(taken, lane, tables[row, lane, np.uint64(_get(entry, lane))])
        return taken

    def plain(tables: Any, row: int, entry: Any) -> Any:
        return tables[row, 0, np.uint64(entry)]

    return eight if isinstance(entry, Lanes) else plain


def with_lanes(records: Any) -> Any:
    """Give the same records; where they have a field :data:`MARK`, fields whose last axis is of eight are of lanes."""
    return records


@overload(with_lanes)
def _with_lanes(records: Any) -> Any:
    def retyped(records: Any) -> Any:
        return _retype(records)

    def same(records: Any) -> Any:
        return records

    return retyped if MARK in records.dtype.fields else same


class LaneRecord(types.Record):
    """A record with fields of lanes; it lives inside kernels only."""

    @property
    def dtype(self) -> np.dtype[Any]:
        """Size of the record, for numba's bookkeeping."""
        return np.dtype(("V", self.size))


register_model(LaneRecord)(models.RecordModel)


def _laned(record: types.Record) -> LaneRecord:
    """Give a record's type with lanes in the place of every last axis of eight.

    It claims no alignment: a copy that numpy made may start anywhere.
    """
    fields = []
    for name, field in record.fields.items():
        kind = field.type
        if isinstance(kind, types.NestedArray) and kind.shape[-1] == WIDTH:
            if kind.ndim == 1:
                kind = lanes
            else:
                kind = types.NestedArray(lanes, kind.shape[:-1])
                kind.aligned = False
        fields.append((name, {"type": kind, "offset": field.offset, "title": field.title}))
    return LaneRecord(fields, record.size, False)


@intrinsic
def _retype(typingctx: Any, records: Any) -> Any:
    result = records.copy(dtype=_laned(records.dtype))

    def emit(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        given = cgutils.create_struct_proxy(sig.args[0])(context, builder, value=args[0])
        made = cgutils.create_struct_proxy(sig.return_type)(context, builder)
        for name in ("meminfo", "parent", "nitems", "itemsize", "shape", "strides"):
            setattr(made, name, getattr(given, name))
        made.data = builder.bitcast(given.data, made.data.type)
        return impl_ret_borrowed(context, builder, sig.return_type, made._getvalue())

    return result(records), emit


def aligned_zeros(shape: tuple[int, ...], kind: np.dtype[Any]) -> Any:
    """Make an array of zeros that starts where a vector of eight may start."""
    size = int(np.prod(shape)) * kind.itemsize
    raw = np.zeros(size + 64, dtype=np.uint8)
    start = -raw.ctypes.data % 64
    return raw[start : start + size].view(kind).reshape(shape)

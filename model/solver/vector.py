"""Vector code, written as formulas: one value stands for the same number of several frames.

Compilers do not find the vectors in this solver by themselves: many frames side by side means
short inner loops, and the guards around array access break them up. So the arithmetic is written
here once, as Python functions that *emit* it. Such a function works on ``Lanes``, values that
live in one vector register, one lane a frame::

    @vector_code
    def scale(code: Code, target: Strip, source: Strip) -> None:
        for k in range(3):
            target[k] = 2.0 * source[k]

It runs once, while numba compiles the kernel that calls it, and leaves behind straight-line
vector instructions: Python loops are unrolled, Python names cost nothing. The kernel passes the
lanes, the work array and, for every parameter, where it starts::

    scale(lanes, work, 40, 52)

``lanes`` is a tuple with as many entries as there are lanes, so that their number is part of
its type and known to the compiler; places in ``work`` count in vectors, not in numbers.

Of the liberties a compiler may take with floating-point numbers only one is granted, to fuse a
multiplication with the addition that follows. It treats all lanes alike, and NaN stays NaN.
"""

# mypy: disable-error-code="no-untyped-call"

from __future__ import annotations

import inspect
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from typing import Any

from llvmlite import ir
from numba.core import cgutils, types
from numba.extending import intrinsic

_DOUBLE = ir.DoubleType()
_INDEX = ir.IntType(64)
_FUSE = ("contract",)
_BYTES = 8


class Lanes:
    """One number of every frame, in a register."""

    def __init__(self, code: Code, value: Any) -> None:
        self.code, self.value = code, value

    def _with(self, operation: str, other: Lanes | float, turned: bool = False) -> Lanes:
        a, b = self.value, self.code.lanes(other).value
        if turned:
            a, b = b, a
        return Lanes(self.code, getattr(self.code.builder, operation)(a, b, flags=_FUSE))

    def __add__(self, other: Lanes | float) -> Lanes:
        return self._with("fadd", other)

    __radd__ = __add__

    def __sub__(self, other: Lanes | float) -> Lanes:
        return self._with("fsub", other)

    def __rsub__(self, other: Lanes | float) -> Lanes:
        return self._with("fsub", other, turned=True)

    def __mul__(self, other: Lanes | float) -> Lanes:
        return self._with("fmul", other)

    __rmul__ = __mul__

    def __truediv__(self, other: Lanes | float) -> Lanes:
        return self._with("fdiv", other)

    def __rtruediv__(self, other: Lanes | float) -> Lanes:
        return self._with("fdiv", other, turned=True)

    def __neg__(self) -> Lanes:
        return Lanes(self.code, self.code.builder.fneg(self.value))

    def __gt__(self, other: Lanes | float) -> Truth:
        """False where either is not a number."""
        return Truth(self.code, self._compare(">", other))

    def equals(self, other: Lanes | float) -> Truth:
        """Equal, lane by lane; False where either is not a number."""
        return Truth(self.code, self._compare("==", other))

    def _compare(self, how: str, other: Lanes | float) -> Any:
        return self.code.builder.fcmp_ordered(how, self.value, self.code.lanes(other).value)


class Truth:
    """Yes or no for every frame."""

    def __init__(self, code: Code, value: Any) -> None:
        self.code, self.value = code, value

    def __and__(self, other: Truth) -> Truth:
        return Truth(self.code, self.code.builder.and_(self.value, other.value))

    def __or__(self, other: Truth) -> Truth:
        return Truth(self.code, self.code.builder.or_(self.value, other.value))

    def pick(self, yes: Lanes | float, no: Lanes | float) -> Lanes:
        """``yes`` in the lanes that are true, ``no`` in the others."""
        a, b = (self.code.lanes(v).value for v in (yes, no))
        return Lanes(self.code, self.code.builder.select(self.value, a, b))


class Strip:
    """A stretch of the work array, one vector after the other: read and write by number."""

    def __init__(self, code: Code, pointer: Any) -> None:
        self.code, self.pointer = code, pointer

    def _at(self, k: int) -> Any:
        return self.code.builder.gep(self.pointer, [_INDEX(k)])

    def __getitem__(self, k: int) -> Lanes:
        return Lanes(self.code, self.code.builder.load(self._at(k), align=_BYTES))

    def __setitem__(self, k: int, lanes: Lanes | float) -> None:
        self.code.builder.store(self.code.lanes(lanes).value, self._at(k), align=_BYTES)

    def further(self, count: Number, size: int) -> Strip:
        """The strip that starts ``count`` times ``size`` vectors further on."""
        step = self.code.builder.mul(count.value, _INDEX(size))
        return Strip(self.code, self.code.builder.gep(self.pointer, [step]))


class Scalars:
    """A flat float64 array, the same for all frames; an entry fills all lanes."""

    def __init__(self, code: Code, pointer: Any) -> None:
        self.code, self.pointer = code, pointer

    def __getitem__(self, k: int) -> Lanes:
        builder = self.code.builder
        return self.code.spread(builder.load(builder.gep(self.pointer, [_INDEX(k)])))


class Places:
    """A flat int32 array of places in the work array, counted in vectors."""

    def __init__(self, code: Code, pointer: Any) -> None:
        self.code, self.pointer = code, pointer

    def strip(self, k: Number) -> Strip:
        """The strip that starts at the place in entry ``k``."""
        builder = self.code.builder
        place = builder.load(builder.gep(self.pointer, [k.value]))
        return self.code.strip(builder.sext(place, _INDEX))


class Number:
    """A whole number known when the code runs."""

    def __init__(self, code: Code, value: Any) -> None:
        self.code, self.value = code, value

    def lanes(self) -> Lanes:
        """The number in all lanes."""
        return self.code.spread(self.code.builder.sitofp(self.value, _DOUBLE))

    def is_zero(self) -> Any:
        """Condition for ``Code.when``."""
        return self.code.builder.icmp_signed("==", self.value, _INDEX(0))


class Sums:
    """Values that change inside a loop; the compiler keeps them in registers."""

    def __init__(self, code: Code, count: int) -> None:
        self.code = code
        self.slots = [cgutils.alloca_once(code.builder, code.vector) for _ in range(count)]

    def __getitem__(self, k: int) -> Lanes:
        return Lanes(self.code, self.code.builder.load(self.slots[k]))

    def __setitem__(self, k: int, lanes: Lanes | float) -> None:
        self.code.builder.store(self.code.lanes(lanes).value, self.slots[k])


class Code:
    """The code being emitted: its lanes, its work array, its constants and its loops."""

    def __init__(self, builder: Any, width: int, work: Any) -> None:
        self.builder, self.width = builder, width
        self.vector = ir.VectorType(_DOUBLE, width)
        self._work = builder.bitcast(work, self.vector.as_pointer())

    def strip(self, place: Any) -> Strip:
        """The work array from one place on."""
        return Strip(self, self.builder.gep(self._work, [place]))

    def lanes(self, value: Lanes | float) -> Lanes:
        """A plain number becomes a constant in all lanes."""
        if isinstance(value, Lanes):
            return value
        return Lanes(self, ir.Constant(self.vector, [float(value)] * self.width))

    def spread(self, scalar: Any) -> Lanes:
        """One number into all lanes."""
        first = self.builder.insert_element(
            ir.Constant(self.vector, ir.Undefined), scalar, ir.IntType(32)(0)
        )
        everywhere = ir.Constant(ir.VectorType(ir.IntType(32), self.width), [0] * self.width)
        return Lanes(self, self.builder.shuffle_vector(first, first, everywhere))

    def sqrt(self, lanes: Lanes) -> Lanes:
        """Square root, rounded correctly."""
        root = cgutils.get_or_insert_function(
            self.builder.module,
            ir.FunctionType(self.vector, [self.vector]),
            f"llvm.sqrt.v{self.width}f64",
        )
        return Lanes(self, self.builder.call(root, [lanes.value]))

    @contextmanager
    def each(self, start: Number, stop: Number) -> Iterator[Number]:
        """A loop over ``start`` to ``stop`` when the code runs; gives the entry number."""
        with cgutils.for_range_slice(self.builder, start.value, stop.value, _INDEX(1), _INDEX) as (
            k,
            _,
        ):
            yield Number(self, k)

    @contextmanager
    def when(self, condition: Any) -> Iterator[tuple[Any, Any]]:
        """Two branches: ``with code.when(c) as (then, otherwise): with then: ...``."""
        with self.builder.if_else(condition) as branches:
            yield branches


def vector_code(emit: Callable[..., None]) -> Any:
    """A function for use inside compiled code that does what ``emit`` emits.

    ``emit(code, ...)`` says by its annotations what each further parameter is: a Strip (given
    as its place in the work array), a Number, Places (an int32 array), or Scalars (given as a
    float64 array and the entry where they start).
    """
    parameters = list(inspect.signature(emit).parameters.values())[1:]
    kinds = [str(parameter.annotation) for parameter in parameters]

    def emitted(typing_context: Any, lanes: Any, work: Any, *given: Any) -> Any:
        def generate(context: Any, builder: Any, signature: Any, values: Any) -> Any:
            def data(k: int) -> Any:
                return context.make_array(signature.args[k])(context, builder, values[k]).data

            def whole(k: int) -> Any:
                return context.cast(builder, values[k], signature.args[k], types.int64)

            code = Code(builder, lanes.count, data(1))
            built: list[Any] = []
            k = 2
            for kind in kinds:
                if kind == "Strip":
                    built.append(code.strip(whole(k)))
                elif kind == "Number":
                    built.append(Number(code, whole(k)))
                elif kind == "Places":
                    built.append(Places(code, data(k)))
                elif kind == "Scalars":
                    built.append(Scalars(code, builder.gep(data(k), [whole(k + 1)])))
                    k += 1
                else:
                    raise TypeError(f"{emit.__name__} has a parameter of unknown kind {kind}")
                k += 1
            emit(code, *built)
            return context.get_dummy_value()

        return types.void(lanes, work, *given), generate

    names = ["typing_context", "lanes", "work"]
    for parameter, kind in zip(parameters, kinds, strict=True):
        names += [parameter.name] + [f"{parameter.name}_start"] * (kind == "Scalars")
    fixed = [inspect.Parameter(name, inspect.Parameter.POSITIONAL_OR_KEYWORD) for name in names]
    emitted.__signature__ = inspect.Signature(fixed)  # type: ignore[attr-defined]
    emitted.__name__ = emit.__name__
    return intrinsic(emitted)

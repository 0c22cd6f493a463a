"""Block Cholesky as vector code: what happens to the 6 x 6 blocks of one joint.

A block below the diagonal is 36 vectors, row by row. A block on the diagonal is its lower
triangle, 21 vectors, row by row; once factored it holds L with 1/L on its own diagonal, so that
nothing divides afterwards. A joint's forces or displacements are 6 vectors.

Partial results stay in registers: while products are subtracted from some rows of a block, and
until these have been divided by the diagonal block, nothing goes to memory. More rows at once
than the registers hold cost a third of the speed.
"""

from __future__ import annotations

from collections.abc import Callable

from model.solver.problem import LOOSE_PIVOT
from model.solver.vector import Code, Number, Places, Strip, Sums, vector_code

SIZE = 6
BLOCK = SIZE * SIZE
TRIANGLE = SIZE * (SIZE + 1) // 2


def low(a: int, b: int) -> int:
    """Place of entry (a, b), b <= a, in a lower triangle."""
    return a * (a + 1) // 2 + b


def _roomy(code: Code) -> bool:
    """Whether there are 32 registers, not 16; all processors with 8 lanes in each have them."""
    return code.width >= 8


@vector_code
def factor_diagonal(
    code: Code,
    block: Strip,
    assembled: Strip,
    absent: Strip,
    status: Strip,
    first_status: Number,
    left: Places,
    start: Number,
    stop: Number,
) -> None:
    """Subtract L L' of the blocks to the left, then factor, testing every pivot.

    block : the joint's triangle, in place. assembled : room for 6 vectors.
    absent : 1 vector, gets 1 where the joint has no stiffness at all; it is given a unit one.
    status : 1 vector, 0 while sound; gets first_status + direction where a pivot fails.
    left, start, stop : which blocks stand to the left.
    """
    stiff = [block[low(a, a)] for a in range(SIZE)]
    none = sum(stiff[1:], stiff[0]).equals(0.0)
    absent[0] = none.pick(1.0, 0.0)
    c = Sums(code, TRIANGLE)
    for a in range(SIZE):
        for b in range(a):
            c[low(a, b)] = block[low(a, b)]
        c[low(a, a)] = assembled[a] = none.pick(1.0, stiff[a])
    for rows in (range(SIZE),) if _roomy(code) else (range(4), range(4, SIZE)):
        with code.each(start, stop) as entry:
            other = left.strip(entry)
            for k in range(SIZE):
                column = [other[SIZE * a + k] for a in range(rows.stop)]
                for a in rows:
                    for b in range(a + 1):
                        c[low(a, b)] = c[low(a, b)] - column[a] * column[b]
    bad = status[0]
    for a in range(SIZE):
        pivot = c[low(a, a)]
        sound = pivot > LOOSE_PIVOT * assembled[a]
        bad = (sound | (bad > 0.0)).pick(bad, first_status.lanes() + float(a))
        inverse = 1.0 / pivot
        for b in range(a + 1, SIZE):
            part = c[low(b, a)] * inverse
            for d in range(b, SIZE):
                c[low(d, b)] = c[low(d, b)] - c[low(d, a)] * part
        root = code.sqrt(inverse)
        block[low(a, a)] = root
        for b in range(a + 1, SIZE):
            block[low(b, a)] = c[low(b, a)] * root
    status[0] = bad


@vector_code
def factor_below(
    code: Code,
    block: Strip,
    diagonal: Strip,
    filled: Number,
    a_blocks: Places,
    b_blocks: Places,
    start: Number,
    stop: Number,
) -> None:
    """Subtract the products A B' of pairs of blocks, then divide by the factored diagonal block.

    filled : 1 when the block has no stiffness of its own and is to start from zero.
    """
    rows = range(3 if _roomy(code) else 2)
    for top in range(0, SIZE, len(rows)):
        c = Sums(code, len(rows) * SIZE)
        with code.when(filled.is_zero()) as (then, otherwise):
            with then:
                for k in range(len(rows) * SIZE):
                    c[k] = block[SIZE * top + k]
            with otherwise:
                for k in range(len(rows) * SIZE):
                    c[k] = 0.0
        with code.each(start, stop) as entry:
            a, b = a_blocks.strip(entry), b_blocks.strip(entry)
            for k in range(SIZE):
                part = [a[SIZE * (top + row) + k] for row in rows]
                for column in range(SIZE):
                    other = b[SIZE * column + k]
                    for row in rows:
                        c[SIZE * row + column] = c[SIZE * row + column] - part[row] * other
        for column in range(SIZE):
            for row in rows:
                done = c[SIZE * row + column] * diagonal[low(column, column)]
                c[SIZE * row + column] = block[SIZE * (top + row) + column] = done
                for later in range(column + 1, SIZE):
                    c[SIZE * row + later] = (
                        c[SIZE * row + later] - done * diagonal[low(later, column)]
                    )


def _solve_forward(cases: int) -> Callable[..., None]:
    def emit(
        code: Code,
        y: Strip,
        work_done: Strip,
        before: Number,
        stride: Number,
        diagonal: Strip,
        blocks: Places,
        columns: Places,
        start: Number,
        stop: Number,
    ) -> None:
        """y of one joint from its forces, in place, for some cases at once; adds y'y.

        blocks, columns : the blocks to the left, and the y of their joints in the very first
        case; ``before`` vectors on it is that of the first case meant here, ``stride`` further
        on that of the next. work_done : y'y so far, 1 vector a case.
        """
        c = Sums(code, cases * SIZE)
        strips = _next_cases(y, stride, cases)
        for case, strip in enumerate(strips):
            for a in range(SIZE):
                c[SIZE * case + a] = strip[a]
        with code.each(start, stop) as entry:
            block = blocks.strip(entry)
            known = _next_cases(columns.strip(entry).further(before, 1), stride, cases)
            for k in range(SIZE):
                for case, strip in enumerate(known):
                    factor = strip[k]
                    for a in range(SIZE):
                        c[SIZE * case + a] = c[SIZE * case + a] - block[SIZE * a + k] * factor
        total = [work_done[case] for case in range(cases)]
        for a in range(SIZE):
            for case, strip in enumerate(strips):
                done = c[SIZE * case + a] * diagonal[low(a, a)]
                strip[a] = done
                total[case] = total[case] + done * done
                for b in range(a + 1, SIZE):
                    c[SIZE * case + b] = c[SIZE * case + b] - diagonal[low(b, a)] * done
        for case in range(cases):
            work_done[case] = total[case]

    return emit


def _next_cases(strip: Strip, stride: Number, cases: int) -> list[Strip]:
    strips = [strip]
    while len(strips) < cases:
        strips.append(strips[-1].further(stride, 1))
    return strips


solve_forward_one = vector_code(_solve_forward(1))
solve_forward_two = vector_code(_solve_forward(2))


@vector_code
def solve_backward(
    code: Code,
    u: Strip,
    before: Number,
    diagonal: Strip,
    below: Strip,
    rows: Places,
    start: Number,
    stop: Number,
) -> None:
    """u of one joint from its y, in place, and the joints eliminated later.

    below : all blocks; start, stop : those of the joint's column. rows : the u of their joints
    in the very first case, ``before`` as above.
    """
    c = Sums(code, SIZE)
    for a in range(SIZE):
        c[a] = u[a]
    with code.each(start, stop) as entry:
        block, known = below.further(entry, BLOCK), rows.strip(entry).further(before, 1)
        for k in range(SIZE):
            factor = known[k]
            for a in range(SIZE):
                c[a] = c[a] - block[SIZE * k + a] * factor
    for a in reversed(range(SIZE)):
        done = c[a] * diagonal[low(a, a)]
        u[a] = done
        for b in range(a):
            c[b] = c[b] - diagonal[low(a, b)] * done

"""Order of elimination for networks of one shape, chosen once from the shape alone and written down as a program."""

from functools import lru_cache

from faultloop.electrical.circuit_layout import ADMITTANCE, CURRENT, RATIO, SOURCE, Layout, branch_ends
from faultloop.electrical.circuit_tape import (
    AMPERES,
    AMPERES_LACKING,
    LOSS,
    ONE,
    VOLTS,
    VOLTS_LACKING,
    Program,
    Tape,
    Value,
    negative,
)

PLANS = 256
Pivot = tuple[int, ...]


@lru_cache(maxsize=PLANS)
def plan(layout: Layout, cut: frozenset[int], dropped: frozenset[int]) -> Program | None:
    """Potentials of all nodes, then currents of all branches, as a program.

    Parameters
    ----------
    layout : Layout
        Places of the unknowns.
    cut : frozenset of int
        Elements with an equation of their own that are open.
    dropped : frozenset of int
        Unknowns that are zero: potentials of the nodes that floating islands are counted from.

    Returns
    -------
    Program or None
        None where the shape alone shows no order.

    Notes
    -----
    The equations are symmetric once each voltage equation is divided by its scale: A = L·D·Lᵀ.  A node is a pivot of
    its own, or of two by two together with the current of an impedance, a source or a winding at it; so a current
    follows from the balance at a node, and never from a small difference of potentials over milliohms.  Next comes
    whatever costs the fewest operations.

    References
    ----------
    .. [1] W. F. Tinney, J. W. Walker, "Direct solutions of sparse network equations by optimally ordered triangular
       factorization", Proc. IEEE 55(11), 1967, 1801-1809.
    .. [2] J. R. Bunch, L. Kaufman, "Some stable methods for calculating inertia and solving symmetric linear systems",
       Math. Comp. 31, 1977, 163-179 (pivots of two by two).
    """
    work = _Elimination(layout, cut, dropped)
    while work.matrix:
        pivot = work.next_pivot()
        if not pivot:
            return None
        work.eliminate(pivot)
    work.substitute()
    work.give_out()
    return work.tape.program()


class _Elimination:
    """A = L·D·Lᵀ on a tape.

    ``tied`` are currents and the nodes from whose balance they can follow: the entry between them is plus or minus one,
    a ratio, or such a number carried on.  ``plain`` is the diagonal as it was; what is lost against it is watched.
    """

    def __init__(self, layout: Layout, cut: frozenset[int], dropped: frozenset[int]) -> None:
        self.layout, self.cut = layout, cut
        self.tape = Tape()
        self.currents = max(layout.own_unknown) + 1  # unknowns below this are currents
        live = {row for row in layout.row if row >= 0} - dropped
        live |= {own for at, own in enumerate(layout.own_unknown) if own >= 0 and at not in cut}
        self.matrix: dict[int, dict[int, Value]] = {row: {} for row in sorted(live)}
        self.side: dict[int, Value] = {}
        self.tied: set[Pivot] = set()
        self.driven: set[int] = set()  # nodes at a source: those of the highest potentials, but for resonance
        self.ends = [[end for end in branch_ends(layout, at) if end[0] in live] for at in range(len(layout.branches))]
        for at, kind in enumerate(layout.kinds):
            if at not in cut:
                self._stamp(at, kind)
        self.first_tied = frozenset(self.tied)
        self.at_currents = {row for pair in self.tied for row in pair}
        self.alone: set[int] = set()  # nodes that were pivots of their own
        self.plain = {row: entries.get(row) for row, entries in self.matrix.items()}
        self.opposed: dict[Value, Value] = {}
        self.slack: Value = None
        self.done: list[tuple[int, Value, dict[int, Value]]] = []
        self.found: dict[int, Value] = {}
        self.volts: dict[int, Value] = {}  # by which an ampere too many at a node moves its potential

    def _stamp(self, at: int, kind: str) -> None:
        """Put an element in."""
        first, own = self.layout.first_branch[at], self.layout.own_unknown[at]
        ends = self.ends[first]
        if kind in (CURRENT, SOURCE):
            self.driven |= {row for row, _ in ends}
        if kind == ADMITTANCE:
            for row, one in ends:
                for column, other in ends:
                    if row <= column:
                        self._add(row, column, _signed(one * other, self.tape.load(at, "admittance")))
        elif kind == CURRENT:
            for row, sign in ends:
                self.side[row] = self.tape.plus(self.side.get(row), _signed(sign, self.tape.load(at, "injected")))
        else:
            for row, sign in ends:
                self._add(row, own, (sign, ONE))
            if kind == RATIO:
                for row, sign in self.ends[first + 1]:
                    self._add(row, own, _signed(-sign, self.tape.load(at, "ratio")))
            else:
                self._add(own, own, negative(self.tape.load(at, "impedance")))
            if kind == SOURCE:
                self.side[own] = self.tape.load(at, "emf")
            self.tied |= {(own, row) for row in self.matrix[own] if row != own}

    def _add(self, row: int, column: int, value: Value) -> None:
        """Add to an entry and to its mirror image."""
        total = self.tape.plus(self.matrix[row].get(column), value)
        for one, other in ((row, column), (column, row)):
            if total is None:
                self.matrix[one].pop(other, None)
            else:
                self.matrix[one][other] = total

    def next_pivot(self) -> Pivot:
        """What costs the fewest operations: a node, a current at its node, a current without one; nothing if stuck."""
        nodes = {node for _, node in self.tied}
        busy = nodes | {current for current, _ in self.tied}
        alone: list[Pivot] = [(row,) for row, entries in self.matrix.items() if row not in busy and row in entries]
        return min([*alone, *self.tied], key=lambda pivot: (*self._cost(pivot), pivot), default=())

    def _cost(self, pivot: Pivot) -> tuple[int, bool]:
        """Operations to eliminate, about; the right side is one more column.

        Of equal ones a node without an admittance of its own comes first: it carries ties on as they are.
        """
        around = len(set().union(*(self.matrix[one] for one in pivot)) - set(pivot))
        driven = any(self.side.get(one) is not None for one in pivot)
        return len(pivot) * around * (around + 1 + driven), pivot[-1] in self.matrix[pivot[-1]]

    def eliminate(self, pivot: Pivot) -> None:
        """Take the pivot's unknowns out of all other equations."""
        tape = self.tape
        self.opposed = {}
        inverse = self._inverted(pivot)
        rows = {one: self.matrix.pop(one) for one in pivot}
        around = sorted(set().union(*rows.values()) - set(pivot))
        self.tied = {pair for pair in self.tied if not set(pair) & set(pivot)}
        for one in pivot:
            shares = {
                other: tape.total(tape.times(inverse[one, two], rows[two].get(other)) for two in pivot)
                for other in around
            }
            start = tape.total(tape.times(inverse[one, two], self.side.get(two)) for two in pivot)
            self.done.append((one, start, shares))
            self.volts[one] = inverse[one, one]
        for at, row in enumerate(around):
            for one, _, shares in self.done[-len(pivot) :]:
                self.matrix[row].pop(one, None)
                self.side[row] = tape.minus(self.side.get(row), tape.times(shares[row], self.side.get(one)))
            for column in around[at:]:
                self._take_away(row, column, pivot, rows)

    def _take_away(self, row: int, column: int, pivot: Pivot, rows: dict[int, dict[int, Value]]) -> None:
        """Lower an entry.

        Between a current and a node, a tie is carried on where neither impedance nor admittance comes into it; a sum is
        no tie, and where it cancels the nodes' balances have lost figures.  Of two impedances side by side, what is
        left of the second's tie is put down without a difference: 1 + 1/det = z·y/det, where det = z·y - 1.
        """
        tape, before = self.tape, self.matrix[row].get(column)
        done = self.done[-len(pivot) :]
        terms = [tape.times(shares[row], rows[one].get(column)) for one, _, shares in done if column in rows[one]]
        terms = [term for term in terms if term is not None]
        if terms == [self.opposed.get(before)]:
            self.matrix[row][column] = self.matrix[column][row] = tape.times(before, self.slack)
            self.tied.discard((row, column))
            return
        for term in terms:
            self._add(row, column, negative(term))
        if not row < self.currents <= column or not terms:
            return
        after = self.matrix[row].get(column)
        if before is None and len(pivot) == 2 and row not in rows[pivot[0]] and column not in rows[pivot[1]]:
            self.tied.add((row, column))
            return
        self.tied.discard((row, column))
        if before is not None and after is not None:
            tape.watch(tape.times(before, tape.inverse(after)), LOSS)

    def _inverted(self, pivot: Pivot) -> dict[Pivot, Value]:
        """Inverse of the pivot, watched for what cancels in it."""
        tape, first, last = self.tape, pivot[0], pivot[-1]
        own, other = self.matrix[first].get(first), self.matrix[last].get(last)
        if first == last:
            self.alone.add(first)
            inverse = tape.inverse(own)
            if self.plain[first] != own and first in self.at_currents:
                tape.watch(tape.times(self.plain[first], inverse), LOSS)
            return {(first, first): inverse}
        tie = self.matrix[first][last]
        square, product = tape.times(tie, tie), tape.times(own, other)
        inverse = tape.inverse(tape.minus(product, square))
        if product is not None and square == (1, ONE) and inverse is not None:
            self.slack = tape.times(product, inverse)
            self.opposed = {(sign, ONE): (-sign * inverse[0], inverse[1]) for sign in (1, -1)}
        if product is not None:
            tape.watch(tape.times(square, inverse), LOSS)
            if self.plain[last] != other:
                tape.watch(tape.times(tape.times(own, self.plain[last]), inverse), LOSS)
        across = negative(tape.times(tie, inverse))
        mine, its = tape.times(other, inverse), tape.times(own, inverse)
        return {(first, first): mine, (first, last): across, (last, first): across, (last, last): its}

    def substitute(self) -> None:
        """Find the unknowns, last first, and give the potentials out."""
        node_of = {row: node for node, row in enumerate(self.layout.row) if row >= 0}
        for row, value, shares in reversed(self.done):
            for other, share in shares.items():
                value = self.tape.minus(value, self.tape.times(share, self.found.get(other)))
            if row in node_of:
                value = self.tape.result(node_of[row], value)
                if row in self.driven:
                    self.tape.watch(value, VOLTS)
            self.found[row] = value
        for node, row in enumerate(self.layout.row):
            if row not in self.found:
                self.tape.result(node, None)

    def give_out(self) -> None:
        """Give all currents out, and see what the balance of each node and of each voltage lacks, in volts."""
        tape, layout = self.tape, self.layout
        lacks: dict[int, Value] = {}
        for at, kind in enumerate(layout.kinds):
            first = layout.first_branch[at]
            currents = [self._current(at, kind)]
            if kind == RATIO:
                currents.append(negative(tape.times(tape.load(at, "ratio"), currents[0])))
            for branch, current in enumerate(currents, first):
                given = tape.result(len(layout.nodes) + branch, current)
                for row, sign in self.ends[branch]:
                    lacks[row] = tape.plus(lacks.get(row), _signed(sign, given))
            if kind not in (ADMITTANCE, CURRENT) and at not in self.cut:
                tape.watch(self._lacking(at, kind), VOLTS_LACKING)
        for row, amperes in lacks.items():
            if row in self.at_currents:
                tape.watch(amperes, AMPERES_LACKING)
            if row not in self.alone or row not in self.at_currents:
                tape.watch(tape.times(self.volts[row], amperes), VOLTS_LACKING)
        for own in sorted({own for own, _ in self.first_tied}):
            tape.watch(self.found[own], AMPERES)

    def _current(self, at: int, kind: str) -> Value:
        """Current of an element."""
        if kind == ADMITTANCE:
            return self.tape.times(self.tape.load(at, "admittance"), self._voltage(self.layout.first_branch[at]))
        if kind == CURRENT:
            return negative(self.tape.load(at, "injected"))
        return self.found.get(self.layout.own_unknown[at])

    def _voltage(self, branch: int) -> Value:
        """Voltage of a branch."""
        return self.tape.total(_signed(sign, self.found.get(row)) for row, sign in branch_ends(self.layout, branch))

    def _lacking(self, at: int, kind: str) -> Value:
        """What is left over in the voltage equation of an element."""
        tape, first = self.tape, self.layout.first_branch[at]
        voltage = self._voltage(first)
        if kind == RATIO:
            return tape.minus(voltage, tape.times(tape.load(at, "ratio"), self._voltage(first + 1)))
        voltage = tape.minus(voltage, tape.times(tape.load(at, "impedance"), self._current(at, kind)))
        return tape.minus(voltage, tape.load(at, "emf")) if kind == SOURCE else voltage


def _signed(sign: int, value: Value) -> Value:
    """The value or its negative."""
    return value if sign > 0 else negative(value)

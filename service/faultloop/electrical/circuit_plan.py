"""Order of elimination for networks of one shape, chosen once and written down as a program."""

from functools import lru_cache

from faultloop.electrical.circuit_islands import IDEAL, OPEN
from faultloop.electrical.circuit_layout import ADMITTANCE, CURRENT, RATIO, SOURCE, Layout
from faultloop.electrical.circuit_tape import ERROR, LOSS, ONE, SIZE, Program, Tape, Value, negative

PLANS = 256
Pivot = tuple[int, ...]


class _NoPivot(Exception):  # noqa: N818 - not an error: such a shape is solved with its values seen
    """The shape alone gives nothing to divide by."""


@lru_cache(maxsize=PLANS)
def plan(layout: Layout, states: tuple[int, ...], dropped: frozenset[int]) -> Program | None:
    """Potentials of all nodes, then currents of all branches, as a program.

    Parameters
    ----------
    layout : Layout
        Places of the unknowns.
    states : tuple of int
        Which elements are open or ideal.
    dropped : frozenset of int
        Unknowns that are zero.

    Returns
    -------
    Program or None
        None where the shape alone shows no order.

    Notes
    -----
    The equations are symmetric once each voltage equation is divided by its scale: A = L·D·Lᵀ.  A node is a pivot of
    its own, or of two by two together with the current of an impedance, a source or a winding at it; so a current
    follows from the balance at a node, and never from a small difference of potentials over milliohms.  Next comes
    whatever has the fewest neighbours.

    References
    ----------
    .. [1] W. F. Tinney, J. W. Walker, "Direct solutions of sparse network equations by optimally ordered triangular
       factorization", Proc. IEEE 55(11), 1967, 1801-1809.
    .. [2] J. R. Bunch, L. Kaufman, "Some stable methods for calculating inertia and solving symmetric linear systems",
       Math. Comp. 31, 1977, 163-179 (pivots of two by two).
    """
    work = _Elimination(layout, states, dropped)
    try:
        while work.matrix:
            work.eliminate(work.next_pivot())
    except _NoPivot:
        return None
    work.substitute()
    work.give_out()
    return work.tape.program()


class _Elimination:
    """A = L·D·Lᵀ on a tape."""

    def __init__(self, layout: Layout, states: tuple[int, ...], dropped: frozenset[int]) -> None:
        self.layout, self.states, self.dropped = layout, states, dropped
        self.currents = max(layout.own_unknown) + 1  # unknowns below this are currents
        self.tape = Tape()
        self.matrix: dict[int, dict[int, Value]] = {}
        self.side: dict[int, Value] = {}
        self.tied: set[tuple[int, int]] = set()  # currents and the nodes from whose balance they can follow
        self.driven: set[int] = set()  # nodes at a source: those of the highest potentials, but for resonance
        self.done: list[tuple[int, Value, dict[int, Value]]] = []
        self.found: dict[int, Value] = {}
        self.volts: dict[int, Value] = {}  # by which an ampere too many at a node moves its potential
        for row in layout.row:
            if row >= 0 and row not in dropped:
                self.matrix[row] = {}
        for at, kind in enumerate(layout.kinds):
            if states[at] != OPEN:
                self._stamp(at, kind)
        self.plain = {row: entries.get(row) for row, entries in self.matrix.items()}

    def _ends(self, branch: int) -> list[tuple[int, int]]:
        """Unknowns of the nodes of a branch, with the sign of the branch at them."""
        rows = [self.layout.row[node] for node in self.layout.terminals[branch]]
        if rows[0] == rows[1]:
            return []
        return [(row, sign) for row, sign in zip(rows, (1, -1), strict=True) if row >= self.currents and row not in self.dropped]

    def _stamp(self, at: int, kind: str) -> None:
        """Put an element in."""
        first, own = self.layout.first_branch[at], self.layout.own_unknown[at]
        ends = self._ends(first)
        if kind in (CURRENT, SOURCE):
            self.driven |= {row for row, _ in ends}
        if kind == ADMITTANCE:
            admittance = self.tape.load(at, "admittance")
            for row, sign in ends:
                for column, other in ends:
                    if row <= column:
                        self._add(row, column, admittance if sign == other else negative(admittance))
        elif kind == CURRENT:
            for row, sign in ends:
                injected = self.tape.load(at, "injected")
                self.side[row] = self.tape.plus(self.side.get(row), injected if sign > 0 else negative(injected))
        elif own not in self.dropped:
            self.matrix[own] = {}
            for row, sign in ends:
                self._add(row, own, (sign, ONE))
            if kind == RATIO:
                for row, sign in self._ends(first + 1):
                    ratio = self.tape.load(at, "ratio")
                    self._add(row, own, negative(ratio) if sign > 0 else ratio)
            elif self.states[at] != IDEAL:
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
        """What costs the fewest operations: a node, a current at its node, or a current that has lost its nodes."""
        tied_rows = {row for pair in self.tied for row in pair}
        costs: list[tuple[int, Pivot]] = []
        for row, entries in self.matrix.items():
            if row not in tied_rows and row in entries:
                around = len(entries) - 1
                costs.append((around * (around + 1 + 2 * (self.side.get(row) is not None)), (row,)))
        for pair in self.tied:
            around = len((self.matrix[pair[0]].keys() | self.matrix[pair[1]].keys()) - set(pair))
            costs.append((2 * around * (around + 1), pair))
        if not costs:
            raise _NoPivot
        return min(costs)[1]

    def eliminate(self, pivot: Pivot) -> None:
        """Take the pivot's unknowns out of all other equations."""
        tape = self.tape
        inverse = self._inverted(pivot)
        rows = {one: {other: value for other, value in self.matrix[one].items() if other not in pivot} for one in pivot}
        around = sorted({other for entries in rows.values() for other in entries})
        parts: dict[int, dict[int, Value]] = {}
        for one in pivot:
            parts[one] = {}
            for other in around:
                share = None
                for two in pivot:
                    share = tape.plus(share, tape.times(inverse[one, two], rows[two].get(other)))
                parts[one][other] = share
        for one in pivot:
            for other in around:
                self.matrix[other].pop(one, None)
        self.tied = {pair for pair in self.tied if not set(pair) & set(pivot)}
        for at, row in enumerate(around):
            for column in around[at:]:
                self._take_away(row, column, [tape.times(parts[one][row], rows[one].get(column)) for one in pivot])
            for one in pivot:
                self.side[row] = tape.minus(self.side.get(row), tape.times(parts[one][row], self.side.get(one)))
        for one in pivot:
            self.volts[one] = inverse[one, one]
            start = None
            for two in pivot:
                start = tape.plus(start, tape.times(inverse[one, two], self.side.get(two)))
            self.done.append((one, start, parts[one]))
            del self.matrix[one]

    def _take_away(self, row: int, column: int, terms: list[Value]) -> None:
        """Lower an entry; one that arises from a single term carries a tie on."""
        before = self.matrix[row].get(column)
        terms = [term for term in terms if term is not None]
        for term in terms:
            self._add(row, column, negative(term))
        if not row < self.currents <= column or not terms:
            return
        after = self.matrix[row].get(column)
        if before is None and len(terms) == 1:
            self.tied.add((row, column))
            return
        self.tied.discard((row, column))
        if before is not None and after is not None:
            self.tape.watch(self.tape.times(before, self.tape.inverse(after)), LOSS)

    def _inverted(self, pivot: Pivot) -> dict[tuple[int, int], Value]:
        """Inverse of the pivot, watched for what cancels in it."""
        tape, first = self.tape, pivot[0]
        own = self.matrix[first].get(first)
        if len(pivot) == 1:
            inverse = tape.inverse(own)
            if self.plain[first] != own:
                tape.watch(tape.times(self.plain[first], inverse), LOSS)
            return {(first, first): inverse}
        second = pivot[1]
        tie, other = self.matrix[first][second], self.matrix[second].get(second)
        square, product = tape.times(tie, tie), tape.times(own, other)
        inverse = tape.inverse(tape.minus(product, square))
        if product is not None:
            tape.watch(tape.times(square, inverse), LOSS)
            if self.plain[second] != other:
                tape.watch(tape.times(tape.times(own, self.plain[second]), inverse), LOSS)
        across = negative(tape.times(tie, inverse))
        return {
            (first, first): tape.times(other, inverse),
            (first, second): across,
            (second, first): across,
            (second, second): tape.times(own, inverse),
        }

    def substitute(self) -> None:
        """Find the unknowns, last first."""
        for row, value, parts in reversed(self.done):
            for other, part in parts.items():
                value = self.tape.minus(value, self.tape.times(part, self.found.get(other)))
            if row >= self.currents:
                value = self.tape.result(self.layout.row.index(row), value)
                if row in self.driven:
                    self.tape.watch(value, SIZE)
            self.found[row] = value
        for node, row in enumerate(self.layout.row):
            if row not in self.found:
                self.tape.result(node, None)

    def give_out(self) -> None:
        """Give all currents out, and see what the balance of each node and of each voltage lacks, in volts."""
        tape, layout = self.tape, self.layout
        lacks: dict[int, Value] = {}
        for at, kind in enumerate(layout.kinds):
            first, own = layout.first_branch[at], layout.own_unknown[at]
            voltage, current = self._voltage(first), self.found.get(own)
            if kind == ADMITTANCE:
                current = tape.times(tape.load(at, "admittance"), voltage) if self.states[at] != OPEN else None
            elif kind == CURRENT:
                current = negative(tape.load(at, "injected"))
            elif self.states[at] != OPEN:
                tape.watch(self._lacking(at, kind, voltage, current), ERROR)
            currents = [(first, current)]
            if kind == RATIO:
                currents.append((first + 1, negative(tape.times(tape.load(at, "ratio"), current))))
            for branch, amperes in currents:
                given = tape.result(len(layout.nodes) + branch, amperes)
                for row, sign in self._ends(branch):
                    lacks[row] = tape.plus(lacks.get(row), given if sign > 0 else negative(given))
        for row, amperes in lacks.items():
            tape.watch(tape.times(self.volts[row], amperes), ERROR)

    def _voltage(self, branch: int) -> Value:
        """Voltage of a branch."""
        plus, minus = self.layout.terminals[branch]
        if plus == minus:
            return None
        return self.tape.minus(self.found.get(self.layout.row[plus]), self.found.get(self.layout.row[minus]))

    def _lacking(self, at: int, kind: str, voltage: Value, current: Value) -> Value:
        """What is left over in the voltage equation of an element."""
        tape = self.tape
        if kind == RATIO:
            return tape.minus(voltage, tape.times(tape.load(at, "ratio"), self._voltage(self.layout.first_branch[at] + 1)))
        if self.states[at] != IDEAL:
            voltage = tape.minus(voltage, tape.times(tape.load(at, "impedance"), current))
        return tape.minus(voltage, tape.load(at, "emf")) if kind == SOURCE else voltage

"""What graph theory says about a bank, before any number: faults, what is joined to what, how many modes never decay.

Everything that must be EXACTLY zero (trapped-charge rates, what a stranded section holds) is decided here by counting
pieces of graphs, so no threshold on a rounded number decides it later.
"""
from dataclasses import dataclass
from fractions import Fraction

# Roles whose opening counts as a fault; a leakage path can be absent, a tool, strap or meter is no part of the bank.
OPENING = ('bleeder', 'balancing', 'series')


class Branch:
    """Stands where a resistor's factor does: an absorption branch, whose conductance is `per_value` times its
    capacitor's value."""

    def __init__(self, per_value):
        self.per_value = per_value


@dataclass(frozen=True)
class Scenario:
    """One circuit before isolation (`start`) and one after (`run`). The maps give a factor on a part's value by its
    index; None takes the part out."""
    fault: str = ''
    when: str = ''                # 'before' | 'at isolation' | ''
    start: tuple = ()
    run: tuple = ()
    merged: tuple | None = None   # the two nodes that a shorted capacitor makes one
    own: bool = True              # do capacitors' own charged_to count?


def scenarios(bank):
    """The healthy bank, then each fault in the order of the file, resistors first."""
    found = [Scenario()]
    for k, part in enumerate(bank.parts):
        if part.kind == 'R' and part.role in OPENING:
            # One element open takes its whole string away: p strings become p-1, or none.
            left = Fraction(part.parallel, part.parallel - 1) if part.parallel > 1 else None
            change = ((k, left),)
            found.append(Scenario(f'{part.id} open', 'before', change, change))
            found.append(Scenario(f'{part.id} open', 'at isolation', (), change))
        elif part.kind == 'R' and part.role == 'leakage':
            # "Absent" is read as never there: the voltages have settled without it too.
            found.append(Scenario(f'{part.id} absent', 'before', ((k, None),), ((k, None),)))
        elif part.kind == 'C':
            if {part.a, part.b} != set(bank.terminals):
                gone = ((k, None),)
                found.append(Scenario(f'{part.id} shorted', 'before', gone, gone, (part.a, part.b), False))
            if part.series > 1:
                # The voltages at isolation are the healthy ones, as if the unit failed at that moment and the others
                # took over its share of voltage; only the capacitance is other from then on.
                change = ((k, Fraction(part.series, part.series - 1)),)
                found.append(Scenario(f'{part.id} one unit shorted', 'at isolation', (), change))
    return found


class Pieces:
    """Union-find: which nodes hang together."""

    def __init__(self, n, edges):
        self.parent = list(range(n))
        for i, j in edges:
            self.parent[self.find(i)] = self.find(j)
        roots = sorted({self.find(i) for i in range(n)}, key=lambda r: min(i for i in range(n) if self.find(i) == r))
        number = {r: k for k, r in enumerate(roots)}
        self.of = [number[self.find(i)] for i in range(n)]
        self.count = len(roots)
        self.members = [[i for i in range(n) if self.of[i] == k] for k in range(self.count)]

    def find(self, i):
        while self.parent[i] != i:
            i = self.parent[i]
        return i


class Holding:
    """How a source held between nodes `a` (at 1) and `b` (at 0) sets all potentials once everything has settled.

    `driven`: nodes with a resistive path to a or b, other than these two: the resistors set them.
    `floating`: resistive pieces with no such path but tied to the rest by capacitors: each keeps its total charge at
    zero, so the capacitances set them. All that is left hangs on nothing and stays at 0.
    """

    def __init__(self, n, resistors, capacitors, a, b):
        self.a, self.b = a, b
        pieces = Pieces(n, [(i, j) for _, i, j, _ in resistors])
        held = {pieces.of[a], pieces.of[b]}
        self.driven = [i for i in range(n) if pieces.of[i] in held and i not in (a, b)]
        all_pieces = Pieces(n, [(i, j) for _, i, j, _ in list(resistors) + list(capacitors)])
        reached = {all_pieces.of[a], all_pieces.of[b]}
        self.floating = [m for k, m in enumerate(pieces.members) if k not in held and all_pieces.of[m[0]] in reached]


class Topology:
    """The graph of a bank under a scenario; parts as (index of the part, node, node, factor on its value)."""

    def __init__(self, bank, scenario):
        self.bank, self.scenario = bank, scenario
        names = []
        for name in list(bank.terminals) + [x for p in bank.parts for x in (p.a, p.b)]:
            if name not in names:
                names.append(name)
        if scenario.merged:
            stays, goes = scenario.merged
            names.remove(goes)
        self.index = {name: k for k, name in enumerate(names)}
        if scenario.merged:
            self.index[goes] = self.index[stays]
        self.n = len(names)
        self.top, self.ref = (self.index[t] for t in bank.terminals)
        start, run = dict(scenario.start), dict(scenario.run)
        self.mains = self._edges('C', run)
        self.start_r, self.run_r = self._edges('R', start), self._edges('R', run)
        # Absorption: an inner node for each branch, r to the capacitor's first node and c to its second.
        # Charged long enough, a floating piece divides by all of its capacitance, the branches' too: its charge is zero.
        self.outer, self.capacitors, self.main_of = self.n, list(self.mains), list(range(len(self.mains)))
        self.whole = [1] * len(self.mains)
        for c, (k, i, j, m) in enumerate(self.mains):
            if bank.parts[k].absorption:
                import absorption
                share = absorption.share(bank.parts[k])
                self.whole[c] = 1 + len(absorption.times(bank.parts[k])) * share
                share = share * m.numerator / m.denominator
                for tau in absorption.times(bank.parts[k]):
                    self.capacitors.append((k, self.n, j, share))
                    self.run_r.append((k, i, self.n, Branch(share / tau)))
                    self.main_of.append(c)            # a branch starts at its capacitor's voltage
                    self.n += 1
        ends = lambda edges: [(i, j) for _, i, j, _ in edges]

        # Before isolation.
        self.holding = Holding(self.n, self.start_r, self.mains, self.top, self.ref)

        # After it. Capacitive pieces: inside one, potentials relative to its first node are the state; between them,
        # the currents of the resistors balance at every moment (a node without a capacitor is a piece of its own).
        self.groups = Pieces(self.n, ends(self.capacitors))
        self.first = [m[0] for m in self.groups.members]
        self.state = [i for i in range(self.n) if i not in self.first]
        self.islands = Pieces(self.n, ends(self.capacitors + self.run_r))
        # One group of each island is its zero of potential.
        grounds = {min(self.groups.of[i] for i in m) for m in self.islands.members}
        self.free_groups = [g for g in range(self.groups.count) if g not in grounds]
        # Resistive pieces keep their charge for ever: that is where trapped charge sits.
        self.clusters = Pieces(self.n, ends(self.run_r))
        grounds = {min(self.clusters.of[i] for i in m) for m in self.islands.members}
        self.free_clusters = [c for c in range(self.clusters.count) if c not in grounds]
        self.trapped = self.clusters.count - self.islands.count      # the number of modes with rate zero
        self.tree, self.chords = self._tree()

    def _edges(self, kind, change):
        out = []
        for k, part in enumerate(self.bank.parts):
            factor = change.get(k, Fraction(1))
            i, j = self.index[part.a], self.index[part.b]
            if part.kind == kind and factor is not None and i != j:
                out.append((k, i, j, factor))
        return out

    def _tree(self):
        """For each state node, the capacitors on its path to its group's first node, as (place in `capacitors`, sign);
        own voltages first, so that a path prefers what the file states. Chords: the capacitors outside the tree."""
        order = sorted(range(len(self.capacitors)),
                       key=lambda c: not (self.scenario.own and self.bank.parts[self.capacitors[c][0]].own is not None))
        joined, tree_edges = Pieces(self.n, []), []
        for c in order:
            _, i, j, _ = self.capacitors[c]
            if joined.find(i) != joined.find(j):
                joined.parent[joined.find(i)] = joined.find(j)
                tree_edges.append(c)
        paths = {f: [] for f in self.first}
        while len(paths) < self.n:
            for c in tree_edges:
                _, i, j, _ = self.capacitors[c]
                if i in paths and j not in paths:
                    paths[j] = paths[i] + [(c, -1)]
                elif j in paths and i not in paths:
                    paths[i] = paths[j] + [(c, 1)]
        return paths, [c for c in order if c not in tree_edges]

    def loop_ratio(self):
        """The greatest over the least capacitance within a mesh of capacitor loops; 1 without loops. (The accuracy
        that the tool promises depends on it.)"""
        meshes = []
        for c in self.chords:
            _, i, j, _ = self.capacitors[c]
            up, down = ({k for k, _ in self.tree[n]} for n in (i, j))
            mesh = {c} | (up ^ down)
            for other in [m for m in meshes if m & mesh]:
                meshes.remove(other)
                mesh |= other
            meshes.append(mesh)
        value = lambda c: self.bank.parts[self.capacitors[c][0]].value * self.capacitors[c][3]
        return max([max(map(value, m)) / min(map(value, m)) for m in meshes], default=Fraction(1))

    def pair(self, names):
        return self.index[names[0]], self.index[names[1]]

    def defined(self, i, j):
        """A voltage between two parts of the circuit that nothing joins is not defined."""
        return self.islands.of[i] == self.islands.of[j]

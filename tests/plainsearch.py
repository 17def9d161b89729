"""Fewest poles by the plainest clauses, sharing no code with contactlogic.

Every end of every pole and every load chooses any net; nothing is left out as alike or wasteful
but the numbering of nets by first appearance.  Each load's state in each row is a variable with a
certificate either way: marks that count steps from the supply, or labels that no closed contact
crosses.  Slow, and meant to be.
"""

from __future__ import annotations

from itertools import combinations

from pysat.solvers import Solver


def least(n, loads, *, isolated=(), budgets=None, single=(), contacts=False, most=6):
    """Fewest poles for loads [(on, free), ...] of n relays; None if `most` are too few.

    isolated: numbers of loads; budgets: {relay: poles}; single: relays whose poles have one throw;
    contacts: throws wired are counted instead of poles.
    """
    for size in range(most + 1):
        throws = size if contacts else None
        if possible(n, loads, size, isolated, budgets or {}, set(single), throws):
            return size
    return None


def possible(n, loads, poles, isolated, budgets, single, throws):
    nets = range(min(3 * poles + 1, 2 * poles + 1 + len(isolated)))
    top = [0]
    clauses = []

    def new():
        top[0] += 1
        return top[0]

    def one_of(literals):
        clauses.append(list(literals))
        clauses.extend([-a, -b] for a, b in combinations(literals, 2))

    relay = [[new() for _ in range(n)] for _ in range(poles)]
    ends = [[[new() for _ in nets] for _ in range(3)] for _ in range(poles)]
    wired = [[None, new(), new()] for _ in range(poles)]
    for p in range(poles):
        one_of(relay[p])
        for e in range(3):
            one_of(ends[p][e])
            for net in nets:
                if net > 3 * p + e + 1:
                    clauses.append([-ends[p][e][net]])
        for i in single:
            clauses.append([-relay[p][i], -wired[p][1], -wired[p][2]])
    if throws is not None:
        every = [throw for pole in wired for throw in pole[1:]]
        clauses.extend([-throw for throw in group] for group in combinations(every, throws + 1))
    for i, limit in budgets.items():
        uses = [new() for _ in range(poles)]
        for p in range(poles):
            for throw in (1, 2):
                clauses.append([-relay[p][i], -wired[p][throw], uses[p]])
        clauses.extend([-use for use in group] for group in combinations(uses, limit + 1))
    place, nowhere = [], []
    for _ in loads:
        place.append([new() for _ in nets])
        nowhere.append(new())
        one_of([*place[-1], nowhere[-1]])

    def joints(row):
        """For every pair of nets, whether a contact between them is closed, as a literal."""
        closed = {}
        for x, y in combinations(nets, 2):
            closed[x, y] = closed[y, x] = new()
            clauses.append([-closed[x, y]])  # the ways it may come about are put in below
            known = clauses[-1]
            for p in range(poles):
                for i in range(n):
                    throw = 1 if row >> i & 1 else 2
                    holds = [relay[p][i], wired[p][throw]]
                    for a, b in ((x, y), (y, x)):
                        way = new()
                        lits = [*holds, ends[p][0][a], ends[p][throw][b]]
                        clauses.append([*(-lit for lit in lits), way])
                        clauses.extend([-way, lit] for lit in lits)
                        clauses.append([-way, closed[x, y]])
                        known.append(way)
        return closed

    def cut(closed, guard, ones, zeros):
        """Labels 1 at net choice `ones`, 0 at `zeros`, equal across closed contacts, if guard."""
        label = [new() for _ in nets]
        pre = [-lit for lit in guard]
        for (x, y), joint in closed.items():
            clauses.append([*pre, -joint, -label[x], label[y]])
        for net in nets:
            clauses.append([*pre, -ones[net], label[net]])
            clauses.append([*pre, -zeros[net], -label[net]])

    yes = new()
    clauses.append([yes])
    supply = [yes if net == 0 else -yes for net in nets]
    for row in range(1 << n):
        state = []
        closed = joints(row)
        depth = poles
        steps = [[new() for _ in nets] for _ in range(depth + 1)]
        for net in nets:
            clauses.append([steps[0][net]] if net == 0 else [-steps[0][net]])
        for d in range(depth):
            for net in nets:
                ways = [steps[d][net]]
                for other in nets:
                    if other != net:
                        way = new()
                        clauses += [[-way, steps[d][other]], [-way, closed[net, other]]]
                        ways.append(way)
                clauses.append([-steps[d + 1][net], *ways])
        for k, (on, free) in enumerate(loads):
            live = new()
            state.append(live)
            if on >> row & 1:
                clauses.append([live])
            elif not free >> row & 1:
                clauses.append([-live])
            clauses.append([-live, -nowhere[k]])
            for net in nets:
                clauses.append([-live, -place[k][net], steps[depth][net]])
            cut(closed, [-live], supply, place[k])
        for k in isolated:
            for other in range(len(loads)):
                if other == k:
                    continue
                together = new()
                shared = []
                for net in nets:
                    both = new()
                    clauses += [[-both, place[k][net]], [-both, place[other][net]]]
                    shared.append(both)
                clauses.append([-together, *shared])
                cut(closed, [-state[k], -state[other], -together], place[k], place[other])
    with Solver("glucose4", bootstrap_with=clauses) as solver:
        return solver.solve()

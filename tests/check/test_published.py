"""Networks known from the literature, wired by hand here, are proved right, and only right."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from contactlogic.check import prove
from contactlogic.network import Network, Pole
from contactlogic.truth import Target


def operated(row: int) -> int:
    return bin(row).count("1")


@pytest.mark.parametrize("n", [2, 3, 5, 16])
def test_odd_parity_takes_twice_n_minus_one_changeovers(n):
    # Shannon 1938 (seen): odd parity of n relays, 4(n - 1) contacts, drawn as 2(n - 1) changeovers.
    relays = tuple(f"K{i}" for i in range(n))
    poles = [Pole("K0", 1, "L", "odd0", "even0")]
    for i in range(1, n - 1):
        poles.append(Pole(relays[i], 1, f"even{i - 1}", f"odd{i}", f"even{i}"))
        poles.append(Pole(relays[i], 2, f"odd{i - 1}", f"even{i}", f"odd{i}"))
    poles.append(Pole(relays[-1], 1, "out", f"even{n - 2}", f"odd{n - 2}"))
    network = Network(relays, "L", {"LAMP": "out"}, tuple(poles))
    network.assert_consistent()
    wanted = {"LAMP": Target(n, sum(1 << row for row in range(1 << n) if operated(row) % 2))}
    assert len(poles) == 2 * (n - 1)
    assert prove(network, wanted, form="bridge").ok
    # Both throws of the middle relays cross, so only the smallest is a ladder.
    assert prove(network, wanted, form="ladder").ok == (n == 2)


@pytest.mark.parametrize("n", [1, 2, 4, 7])
def test_one_lattice_counts_how_many_are_operated(n):
    # Shannon 1938 (seen): all n + 1 exact-count functions in one lattice, n(n + 1) contacts,
    # drawn as n(n + 1)/2 changeovers.
    relays = tuple(f"K{i}" for i in range(n))

    def net(level: int, count: int) -> str:
        return f"{level}_{count}" if level else "L"

    poles = tuple(
        Pole(relays[i], count + 1, net(i, count), net(i + 1, count + 1), net(i + 1, count))
        for i in range(n)
        for count in range(i + 1)
    )
    network = Network(relays, "L", {f"Z{k}": net(n, k) for k in range(n + 1)}, poles)
    network.assert_consistent()
    wanted = {
        f"Z{k}": Target(n, sum(1 << row for row in range(1 << n) if operated(row) == k))
        for k in range(n + 1)
    }
    assert len(poles) == n * (n + 1) // 2
    assert prove(network, wanted, form="bridge", isolated=list(wanted)).ok


@given(st.integers(1, 5), st.data())
def test_a_selecting_tree_has_no_sneak_paths(n, data):
    # Shannon 1949; Moore 1960 (seen in abstract): a full selecting tree of n relays to 2^n loads
    # takes 2^n - 1 changeovers and has no sneak paths.
    relays = tuple(f"K{i}" for i in range(n))
    poles = []
    for i in reversed(range(n)):
        for part in range(1 << (n - 1 - i)):
            net = f"{i + 1}_{part}" if i + 1 < n else "L"
            poles.append(Pole(relays[i], part + 1, net, f"{i}_{2 * part + 1}", f"{i}_{2 * part}"))
    loads = {f"D{row}": f"0_{row}" for row in range(1 << n)}
    poles.sort(key=lambda pole: (relays.index(pole.relay), pole.number))
    network = Network(relays, "L", loads, tuple(poles))
    wanted = {f"D{row}": Target(n, 1 << row) for row in range(1 << n)}
    assert len(poles) == 2**n - 1
    assert prove(network, wanted, form="ladder", isolated=list(wanted)).ok
    row = data.draw(st.integers(0, (1 << n) - 1))
    other = data.draw(st.integers(0, (1 << n) - 1).filter(lambda r: r != row))
    changed = wanted | {f"D{row}": Target(n, 1 << other)}
    wrong = prove(network, changed, form="ladder").wrong
    assert [(w.load, w.row) for w in wrong] == [(f"D{row}", min(row, other))]

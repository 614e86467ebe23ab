"""Which circuits move as one: by body, terminal, tie or shared neutral."""

from __future__ import annotations

import itertools
from collections.abc import Sequence

from balancer.panel import Circuit, Installation, Panel, SupplySystem, Terminal


def canonical_key(circuits: Sequence[Circuit]) -> tuple[int, str, str]:
    """Order by place as found, then label: the same for any order of rows."""
    landed = [terminal for circuit in circuits for terminal in circuit.landing]
    first = min(landed) if landed else Terminal(10_000)
    return (first.space, first.half, min(circuit.label for circuit in circuits))


def _is_pair_broken(panel: Panel, first: Circuit, second: Circuit) -> bool:
    """Whether a shared-neutral pair has both hots on one leg as found."""
    if not (first.is_landed and second.is_landed):
        return False
    return panel.leg(first.landing[0].space) is panel.leg(second.landing[0].space)


def _can_mend(pair: Sequence[Circuit]) -> bool:
    """Whether a pair found on one leg can be put right: one of the two may move, to beside a full-width breaker."""
    fixed = [circuit for circuit in pair if circuit.is_fixed]
    return not fixed or (len(fixed) == 1 and not fixed[0].landing[0].half)


def group_circuits(installation: Installation) -> list[tuple[Circuit, ...]]:
    """Join circuits that move as one: one body, one terminal, one tie, one shared neutral."""
    circuits = installation.circuits
    parent = list(range(len(circuits)))

    def root(index: int) -> int:
        while parent[index] != index:
            index = parent[index]
        return index

    def join(members: Sequence[int]) -> None:
        for member in members[1:]:
            parent[root(member)] = root(members[0])

    pulled_out = circuits_to_mend(installation)
    by_key: dict[tuple[str, object], list[int]] = {}
    for index, circuit in enumerate(circuits):
        if circuit.label not in pulled_out:
            for terminal in circuit.landing:
                by_key.setdefault(("space", terminal.space), []).append(index)
        if circuit.tied:
            by_key.setdefault(("tied", circuit.tied.casefold()), []).append(index)
        if circuit.shared_neutral:
            by_key.setdefault(("neutral", circuit.shared_neutral.casefold()), []).append(index)
    for members in by_key.values():
        join(members)
    groups: dict[int, list[Circuit]] = {}
    for index, circuit in enumerate(circuits):
        groups.setdefault(root(index), []).append(circuit)
    return [tuple(sorted(group, key=lambda c: canonical_key((c,)))) for group in groups.values()]


def circuits_to_mend(installation: Installation) -> frozenset[str]:
    """Give labels of pairs found on one leg that can be put right: out of the body or terminal that they share."""
    if installation.panel.supply.system is SupplySystem.IN_PHASE:
        return frozenset()
    pairs = shared_neutral_pairs(installation)
    return frozenset(
        circuit.label
        for pair in pairs
        if _is_pair_broken(installation.panel, *pair) and _can_mend(pair)
        for circuit in pair
    )


def shared_neutral_pairs(installation: Installation) -> tuple[tuple[Circuit, Circuit], ...]:
    """Give the shared-neutral pairs: exactly two 120 V circuits under one label."""
    by_label: dict[str, list[Circuit]] = {}
    for circuit in installation.circuits:
        if circuit.shared_neutral and circuit.poles == 1:
            by_label.setdefault(circuit.shared_neutral.casefold(), []).append(circuit)
    return tuple((group[0], group[1]) for group in by_label.values() if len(group) == 2)


def keeps_company(order: Sequence[Circuit]) -> bool:
    """Whether circuits of one tie, and those of one shared neutral, follow each other without a stranger between."""
    for names in ([c.tied.casefold() for c in order], [c.shared_neutral.casefold() for c in order]):
        runs = [name for name, _ in itertools.groupby(names) if name]
        if len(runs) != len(set(runs)):
            return False
    return True

import itertools

from hypothesis import given
from hypothesis import strategies as st

from balancer.arrange.order import Item, order_moves
from balancer.panel import Terminal


def item(name: str, source: list[int], target: list[int], conductors: int | None = None) -> Item:
    return Item(
        circuits=(name,),
        source=frozenset(map(Terminal, source)),
        target=frozenset(map(Terminal, target)),
        conductors=len(source) if conductors is None else conductors,
    )


def test_a_chain_starts_at_its_vacant_end_with_nothing_loose():
    order = order_moves([item("x", [1], [3]), item("y", [3], [5]), item("z", [5], [7])])
    assert [operation.item for operation in order.operations] == [2, 1, 0]
    assert order.max_loose == 0


def test_a_round_takes_one_conductor_aside_and_lands_it_last():
    order = order_moves([item("x", [1], [3]), item("y", [3], [5]), item("z", [5], [1])])
    assert order.operations[0].lifted_before == (0,)
    assert [operation.item for operation in order.operations] == [2, 1, 0]
    assert [operation.was_lifted for operation in order.operations] == [False, False, True]
    assert order.max_loose == 1


def test_two_rounds_are_undone_one_after_the_other():
    swaps = [item("x", [1], [3]), item("p", [5], [7]), item("y", [3], [1]), item("q", [7], [5])]
    assert order_moves(swaps).max_loose == 1


def test_a_round_through_a_spare_breaker_lays_the_spare_aside():
    order = order_moves([item("x", [1], [3]), item("spare", [3], [1], conductors=0)])
    assert order.operations[0].lifted_before == (1,)
    assert order.max_loose == 0


def test_a_pair_that_changes_places_with_two_single_breakers_leaves_two_conductors_loose():
    order = order_moves([item("pair", [1, 3], [5, 7]), item("x", [5], [1]), item("y", [7], [3])])
    assert order.max_loose == 2


def test_two_conductors_turned_on_one_breaker_leave_one_loose():
    assert order_moves([item("range", [1, 3], [3, 1])]).max_loose == 1


def test_a_new_circuit_waits_until_its_place_is_free():
    order = order_moves([item("new", [], [1]), item("x", [1], [3])])
    assert [operation.item for operation in order.operations] == [1, 0]


@st.composite
def moves(draw: st.DrawFn) -> list[Item]:
    """Bodies of one or two places, each somewhere else afterwards; a few places stay vacant."""
    sizes = draw(st.lists(st.sampled_from([1, 1, 2]), min_size=1, max_size=5))
    spare_places = draw(st.integers(0, 2))
    places = range(1, sum(sizes) + spare_places + 1)
    starts, ends = draw(st.permutations(places)), draw(st.permutations(places))
    cuts = list(itertools.accumulate(sizes, initial=0))
    return [
        item(f"i{index}", list(starts[a:b]), list(ends[a:b]))
        for index, (a, b) in enumerate(itertools.pairwise(cuts))
        if set(starts[a:b]) != set(ends[a:b])
    ]


def fewest_loose_by_exhaustion(items: list[Item]) -> int:
    """Bottleneck search over every state (at its source, aside, at its target) of every item."""
    best = {(0,) * len(items): 0}
    waiting = list(best)
    while waiting:
        state = waiting.pop()
        for index, each in enumerate(items):
            for there in (1, 2):
                if state[index] >= there:
                    continue
                held = [o.source if s == 0 else o.target for o, s in zip(items, state, strict=True) if s != 1]
                own = each.source if state[index] == 0 else frozenset()
                others = frozenset().union(*held) - own
                if there == 2 and each.target & others:
                    continue
                after = (*state[:index], there, *state[index + 1 :])
                loose = sum(o.conductors for o, s in zip(items, after, strict=True) if s == 1)
                peak = max(best[state], loose)
                if peak < best.get(after, 10**9):
                    best[after] = peak
                    waiting.append(after)
    return best[(2,) * len(items)]


@given(moves())
def test_no_other_order_leaves_fewer_conductors_loose(items):
    assert order_moves(items).max_loose == fewest_loose_by_exhaustion(items)


@given(moves())
def test_every_item_is_moved_once_onto_a_free_place(items):
    places = dict.fromkeys(range(len(items)), "source")
    for operation in order_moves(items).operations:
        for lifted in operation.lifted_before:
            assert places[lifted] == "source"
            places[lifted] = "aside"
        assert operation.was_lifted is (places[operation.item] == "aside")
        held = [items[i].source if at == "source" else items[i].target for i, at in places.items() if at != "aside"]
        own = frozenset() if operation.was_lifted else items[operation.item].source
        assert not items[operation.item].target & (frozenset().union(*held) - own)
        places[operation.item] = "target"
    assert set(places.values()) <= {"target"}

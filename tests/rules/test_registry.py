"""The check as a whole: order, arrangements, and what a plan may not add."""

import re
from itertools import pairwise

import pytest
from hypothesis import given
from hypothesis import strategies as st

from balancer.panel import Circuit, Installation, Load, Panel, Terminal, Volts, Wire, ordinary_spaces, parse_landing
from balancer.rules import RULES, Finding, Severity, check_installation, errors_of, new_errors

GRAVEST_FIRST = [Severity.ERROR, Severity.WARNING, Severity.NOTICE]


def troubled_house(circuit, installation):
    return installation(
        circuit("red", "1", shared_neutral="n"),
        circuit("black", "5", shared_neutral="n"),
        circuit("lights", "7", breaker_a=20, wire=Wire("14", "cu")),
        circuit("alarms", "7", description=""),
    )


def test_clean_panel_has_no_findings(circuit, installation):
    assert check_installation(installation(circuit("x", "1", breaker_a=15), circuit("y", "3", breaker_a=20))) == ()


def test_errors_come_first_then_warnings_then_notices(circuit, installation):
    severities = [finding.severity for finding in check_installation(troubled_house(circuit, installation))]
    assert severities == [Severity.ERROR, Severity.ERROR, Severity.WARNING, Severity.NOTICE]


def test_arrangement_is_judged_and_not_the_landings_as_found(circuit, installation):
    house = troubled_house(circuit, installation)
    mended = {**house.as_found, "black": parse_landing("3")}
    before, after = check_installation(house), check_installation(house, mended)
    assert "shared-neutral-one-leg" in [finding.rule for finding in before]
    assert "shared-neutral-one-leg" not in [finding.rule for finding in after]
    assert new_errors(before, after) == ()


def test_error_that_an_arrangement_makes_is_new(circuit, installation):
    house = installation(circuit("red", "1", shared_neutral="n"), circuit("black", "3", shared_neutral="n"))
    before = check_installation(house)
    after = check_installation(house, {**house.as_found, "black": parse_landing("5")})
    assert errors_of(before) == ()
    assert [finding.rule for finding in new_errors(before, after)] == ["shared-neutral-one-leg"]
    assert errors_of(after) == new_errors(before, after)


def test_same_error_of_the_same_circuits_is_not_new_in_another_order():
    def error(*circuits):
        return Finding(rule="r", severity=Severity.ERROR, circuits=circuits, message="")

    assert new_errors([error("x", "y")], [error("y", "x")]) == ()
    assert new_errors([error("x", "y")], [error("x", "z")]) == (error("x", "z"),)


def test_warning_is_no_new_error():
    warning = Finding(rule="r", severity=Severity.WARNING, circuits=(), message="")
    assert new_errors([], [warning]) == ()


def test_rule_names_are_unique_words_and_every_rule_cites_an_article():
    names = [rule.name for rule in RULES]
    assert len(set(names)) == len(names)
    assert all(re.fullmatch(r"[a-z0-9]+(-[a-z0-9]+)+", name) for name in names)
    assert all(re.search(r"NEC 2023, \d{3}\.\d", rule.citation) for rule in RULES)


@pytest.mark.parametrize("label", ["[red]Range[/red]", "=cmd", "\x1b[31mRange", "x" * 300])
def test_label_is_carried_as_it_is(circuit, installation, label):
    [finding] = check_installation(installation(circuit(label, "1", breaker_a=20, wire=Wire("14", "cu"))))
    assert finding.circuits == (label,)
    assert finding.message.startswith(f"{label} (space 1): ")


@st.composite
def single_pole_circuits(draw):
    count = draw(st.integers(2, 7))
    return [
        Circuit(
            label=f"c{index}",
            volts=Volts.V120,
            landing=draw(
                st.sampled_from([(), (Terminal(draw(st.integers(1, 8)), draw(st.sampled_from(["", "a", "b"]))),)])
            ),
            load=Load(neutral_a=draw(st.sampled_from([3.0, 14.0, 21.0]))),
            breaker_a=draw(st.sampled_from([None, 15.0, 20.0, 55.0])),
            wire=draw(st.sampled_from([None, Wire("14", "cu")])),
            shared_neutral=draw(st.sampled_from(["", "n"])),
            tied=draw(st.sampled_from(["", "t"])),
            is_continuous=draw(st.booleans()),
        )
        for index in range(count)
    ]


@given(circuits=single_pole_circuits(), data=st.data())
def test_findings_do_not_depend_on_the_order_of_rows(circuits, data):
    panel = Panel(spaces=ordinary_spaces(8), stab_a=40.0, tandem_spaces=frozenset({5, 6}))
    shuffled = data.draw(st.permutations(circuits))
    findings = check_installation(Installation(panel=panel, circuits=tuple(circuits)))
    assert check_installation(Installation(panel=panel, circuits=tuple(shuffled))) == findings
    ranks = [GRAVEST_FIRST.index(finding.severity) for finding in findings]
    assert all(first <= second for first, second in pairwise(ranks))

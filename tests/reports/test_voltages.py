from collections.abc import Callable
from dataclasses import replace

import pytest

from balancer.electrical.scenario_sets import connected_scenarios
from balancer.panel import Arrangement, Installation, Supply, Wire
from balancer.reports.voltages import LOST_NEUTRAL_CAUTION, PanelVoltages, panel_voltages, voltages_block

Render = Callable[..., str]

SERVICE = Supply(
    transformer_kva=25, impedance_pct=1.8, service_wire=Wire("2/0", "al"), neutral_wire=Wire("2", "al"), length_ft=70
)


def with_service(installation: Installation, supply: Supply) -> Installation:
    return replace(installation, panel=replace(installation.panel, supply=supply))


def test_panel_without_impedances_has_no_voltages(installation: Installation) -> None:
    scenarios = connected_scenarios(installation)
    assert panel_voltages(installation, scenarios, installation.as_found, 0) is None
    assert voltages_block([("as found", None)]) is None


def test_voltages_stand_side_by_side_with_the_caution(
    installation: Installation, as_left: Arrangement, render: Render
) -> None:
    served = with_service(installation, SERVICE)
    scenarios = connected_scenarios(served)
    found, left = (panel_voltages(served, scenarios, each, 0) for each in (served.as_found, as_left))
    block = voltages_block([("as found", found), ("as left", left)])
    assert block is not None
    text = render(block)
    assert LOST_NEUTRAL_CAUTION in " ".join(text.split())
    assert [text.count(unit) for unit in ("as found", "as left", "If the neutral is lost")] == [1, 1, 1]


def test_less_neutral_current_warms_the_neutral_less(installation: Installation, as_left: Arrangement) -> None:
    served = with_service(installation, SERVICE)
    scenarios = connected_scenarios(served)
    found, left = (panel_voltages(served, scenarios, each, 0) for each in (served.as_found, as_left))
    assert found is not None
    assert found.service is not None
    assert left is not None
    assert left.service is not None
    # Heat goes with the square of the current: 31 A as found, 9 A as left.
    ratio = left.service.neutral_loss_w / found.service.neutral_loss_w
    assert ratio == pytest.approx((9 / 31) ** 2, rel=0.02)


def test_a_service_that_cannot_carry_the_load_is_said(render: Render) -> None:
    block = voltages_block([("as found", PanelVoltages(None, None, "no steady voltage"))])
    assert block is not None
    assert render(block) == "As found: no steady voltage.\n"

"""The wording of the panel's directory."""

from balancer.panel import Role
from balancer.rules import Severity

RULE = "directory-wording-missing"


def test_blank_wording_is_one_notice_with_every_circuit(circuit, look):
    circuits = [circuit("x", "1", description=" "), circuit("y", "3", description=""), circuit("z", "5")]
    [finding] = look(RULE, *circuits)
    assert finding.severity is Severity.NOTICE
    assert finding.circuits == ("x", "y")
    assert "408.4(A)" in finding.citation


def test_worded_circuits_and_spares_are_fine(circuit, look):
    assert look(RULE, circuit("x", "1"), circuit("spare", "3", role=Role.SPARE, description="")) == []

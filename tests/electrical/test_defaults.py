import pytest

from balancer.electrical.defaults import default_load_a, default_pf, known_uses, normal_use
from balancer.electrical.shipped_tables import read_table
from balancer.panel import PowerFactor, Volts


def test_a_refrigerator_runs_near_five_amps_on_a_twenty_amp_breaker():
    # common practice
    assert default_load_a("refrigeration", 20, Volts.V120) == 5


def test_a_water_heater_of_4500_watts_on_its_thirty_amp_breaker():
    # derived: 4500 W / 240 V
    assert default_load_a("water heating", 30, Volts.V240) == 4500 / 240


def test_a_dishwasher_is_the_ten_amp_one_of_annex_d():
    # NFPA 70 Annex D, Example D1(b): dishwasher 10 A, on its 20 A circuit
    assert default_load_a("dishwasher", 20, Volts.V120) == 10


@pytest.mark.parametrize(
    ("use", "volts", "value"),
    [
        # ELCAP 1990 end-use metering (public domain)
        pytest.param("refrigeration", Volts.V120, 0.9, id="refrigerator"),
        pytest.param("laundry", Volts.V120, 0.9, id="clothes washer"),
        pytest.param("laundry", Volts.V240, 0.99, id="clothes dryer"),
        pytest.param("dishwasher", Volts.V120, 0.98, id="dishwasher"),
        pytest.param("water heating", Volts.V240, 1.0, id="water heater"),
        # electric co-operative generator-sizing table
        pytest.param("cooling", Volts.V240, 0.97, id="central air conditioner"),
        # published wattage table
        pytest.param("lighting", Volts.V120, 0.9, id="LED lights"),
        pytest.param("EV charging", Volts.V240, 0.99, id="EV charging equipment"),
    ],
)
def test_power_factors_are_the_published_ones(use, volts, value):
    assert default_pf(use, volts) == PowerFactor(value)


def test_every_default_names_its_source():
    for line, row in read_table("use_defaults.csv"):
        assert row["share_source"], line
        assert bool(row["pf"]) == bool(row["pf_source"]), line


@pytest.mark.parametrize("use", known_uses())
@pytest.mark.parametrize("volts", list(Volts))
def test_no_default_overloads_its_breaker(use, volts):
    assert 0 < default_load_a(use, 20, volts) <= 16
    pf = default_pf(use, volts)
    assert pf is None or 0.5 <= pf.value <= 1


@pytest.mark.parametrize("text", ["EV charging", "ev_charging", "  EV   Charging ", "Ev-Charging"])
def test_uses_are_read_whatever_their_case_and_spaces(text):
    assert normal_use(text) == "EV charging"


@pytest.mark.parametrize("text", ["", "  ", "General"])
def test_a_blank_use_is_general(text):
    assert normal_use(text) == "general"
    assert default_load_a(text, 20, Volts.V120) == default_load_a("general", 20, Volts.V120)
    assert default_pf(text) is None


def test_nothing_is_assumed_without_a_known_use_and_breaker():
    assert normal_use("sauna") is None
    assert default_load_a("sauna", 20, Volts.V120) is None
    assert default_pf("sauna") is None
    assert default_load_a("lighting", None, Volts.V120) is None


def test_the_uses_an_inventory_may_name_are_known():
    expected = (
        "lighting, kitchen, refrigeration, heating, cooling, water heating, laundry, electronics, motor, EV charging"
    )
    assert set(expected.split(", ")) <= set(known_uses())

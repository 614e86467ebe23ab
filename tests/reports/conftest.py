"""A small hand-made panel and a plan for it, so that reports are tested without a solver."""

from collections.abc import Callable
from dataclasses import replace

import pytest
from rich.console import Console, RenderableType

from balancer.arrange.clamp import ClampReading
from balancer.arrange.explain import Contribution, HeldBy, PeakExplanation
from balancer.arrange.results import ObjectiveName, ObjectiveResult, Options, Plan, Tradeoff, TradeoffPoint
from balancer.arrange.work import How, Part, PartKind, PreMoveTest, Step, Work
from balancer.electrical.phasors import PanelCurrents
from balancer.electrical.scenario_sets import connected_scenarios
from balancer.panel import (
    Arrangement,
    Circuit,
    Installation,
    Leg,
    Load,
    Panel,
    Pole,
    Role,
    Volts,
    ordinary_spaces,
    parse_landing,
)
from balancer.reports.answers import AsFoundAnswer, PlanAnswer
from balancer.rules import Finding, Severity

HOSTILE_NAME = "k\x1b[31m1 [bold red]=cmd|'/c calc'!A1[/bold red] \U0001f525 \u202e \"q\" " + "x" * 300


def circuit(label: str, space: str, amps: float, breaker_a: float = 20, description: str = "") -> Circuit:
    return Circuit(
        label=label,
        description=description,
        landing=parse_landing(space) if space else (),
        volts=Volts.V120,
        load=Load(neutral_a=amps),
        breaker_a=breaker_a,
    )


def two_pole(label: str, space: str, volts: Volts, load: Load, role: Role = Role.LOAD) -> Circuit:
    return Circuit(label=label, landing=parse_landing(space), volts=volts, load=load, breaker_a=30, role=role)


@pytest.fixture
def installation() -> Installation:
    cooking = Load(line_a=20, neutral_a=3, neutral_pole=Pole.FIRST)
    circuits = (
        two_pole("range", "1-3", Volts.V120_240, cooking),
        circuit("kitchen", "5", 10, description="Kitchen counter left of the sink and the window"),
        circuit("bath", "2", 12, description="\u6f22\u5b57 bath"),
        circuit("hall", "6", 9),
        circuit("lights", "12a", 2, breaker_a=15),
        circuit("pump", "12b", 1, breaker_a=15),
        two_pole("heater", "8b-10a", Volts.V240, Load(line_a=15)),
        circuit("desk", "8a", 1, breaker_a=15),
        circuit("porch", "10b", 1, breaker_a=15),
        two_pole("inlet", "9-11", Volts.V240, Load(), Role.BACKFED),
        circuit("new", "", 4),
    )
    panel = Panel(spaces=ordinary_spaces(14), name="House", main_a=100, reserved=frozenset({14}))
    return Installation(panel=panel, circuits=circuits, inventory_file="house.csv", notices=("Column colour is kept.",))


@pytest.fixture
def as_left(installation: Installation) -> Arrangement:
    moved = {"kitchen": "7", "range": "3-1", "new": "13"}
    return installation.as_found | {label: parse_landing(space) for label, space in moved.items()}


def objective(name: ObjectiveName, value: float, bound: float, *, is_proven: bool) -> ObjectiveResult:
    return ObjectiveResult(name=name, value=value, bound=bound, is_proven=is_proven, proved_by="search")


@pytest.fixture
def plan(installation: Installation, as_left: Arrangement) -> Plan:
    scenarios = connected_scenarios(installation)
    currents = PanelCurrents(installation, scenarios)
    peaks = currents.peaks(as_left)
    best_a = peaks.neutral.value_a
    return Plan(
        installation=installation,
        scenarios=scenarios,
        options=Options(),
        as_found=installation.as_found,
        as_left=as_left,
        peaks_as_found=currents.peaks(installation.as_found),
        peaks_as_left=peaks,
        objectives=(
            objective(ObjectiveName.NEUTRAL, best_a, best_a, is_proven=True),
            objective(ObjectiveName.HEAVY_LEG, 50.0, 48.5, is_proven=False),
            objective(ObjectiveName.EFFORT, 3, 3, is_proven=True),
        ),
        optimum_peak_neutral_a=best_a,
        bound_peak_neutral_a=best_a,
        is_proven=True,
        landings_changed=3,
        effort=3.0,
    )


def explanation(scenario_name: str) -> PeakExplanation:
    return PeakExplanation(
        scenario=0,
        scenario_name=scenario_name,
        neutral_a=13.0,
        leg_a=(Contribution(circuit="bath", leg=Leg.A, current_a=12, along_neutral_a=12),),
        leg_b=(Contribution(circuit="kitchen", leg=Leg.B, current_a=10, along_neutral_a=-10),),
        rest_a_a=1.0,
        rest_b_a=0.0,
        rest_count_a=2,
        rest_count_b=0,
        held_by=HeldBy.ONE_LOAD,
        sentence="the bath alone draws 12.0 A with nothing to set against it.",
    )


WORK = Work(
    steps=(
        Step(
            circuit="kitchen",
            description="Kitchen counter",
            from_=parse_landing("5"),
            to=parse_landing("7"),
            how=How.MOVE_BREAKER,
            action="Move the 20 A breaker with its conductor from space 5 to space 7.",
            goes_along=("Its load neutral goes along.",),
            splice_text="A splice may be needed: reach 7 in.",
        ),
    ),
    parts=(Part(kind=PartKind.FILLER, quantity=1, circuits=(), text="filler plate for space 5, left open"),),
    pre_moves=(PreMoveTest(circuit="kitchen", landing=parse_landing("5"), text="kitchen: clamp hot and neutral."),),
    max_loose=1,
)

ERROR = Finding(
    rule="breaker-above-conductor",
    severity=Severity.ERROR,
    circuits=("hall",),
    message="The breaker is too large.",
    citation="NEC 2023, 240.4(D)",
)


@pytest.fixture
def error_finding() -> Finding:
    return ERROR


@pytest.fixture
def hostile_name() -> str:
    return HOSTILE_NAME


NOTICE = replace(ERROR, rule="wording", severity=Severity.NOTICE)


@pytest.fixture
def before(plan: Plan) -> AsFoundAnswer:
    return AsFoundAnswer(
        installation=plan.installation,
        scenarios=plan.scenarios,
        peaks=plan.peaks_as_found,
        explanation=explanation(plan.scenarios.names[0]),
        findings=(ERROR, NOTICE),
    )


@pytest.fixture
def answer(plan: Plan, before: AsFoundAnswer) -> PlanAnswer:
    point = TradeoffPoint(
        landings=1,
        landings_changed=1,
        peak_neutral_a=21.0,
        peak_imbalance_a=20.0,
        peak_heavy_leg_a=60.0,
        bound_a=20.98,
        is_proven=True,
        arrangement=plan.as_left,
    )
    reading = ClampReading(
        switch_on="bath",
        circuits_on=("bath",),
        leg_a_a=12,
        leg_b_a=0,
        neutral_a=12,
        tolerance_a=0.6,
        is_assumed=False,
        text="",
    )
    return PlanAnswer(
        plan=plan,
        work=WORK,
        clamp_readings=(reading,),
        before=before,
        explanation=explanation(plan.scenarios.names[0]),
        findings=(NOTICE,),
        cured=(ERROR,),
        fewer=Tradeoff(points=(point,), flat_from=None),
    )


@pytest.fixture
def render() -> Callable[..., str]:
    """Render as a pipe sees it: no colours, a given width; without the blanks at the ends of lines."""

    def rendered(renderable: RenderableType, width: int = 80) -> str:
        console = Console(width=width, markup=False, highlight=False, emoji=False, color_system=None)
        with console.capture() as capture:
            console.print(renderable)
        return "".join(f"{line.rstrip()}\n" for line in capture.get().splitlines())

    return rendered

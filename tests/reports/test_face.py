from collections.abc import Callable
from dataclasses import replace

import pytest
from rich.cells import cell_len

from balancer.panel import Arrangement, Installation, Leg, Panel, Space, ordinary_spaces, parse_landing
from balancer.reports.face import PanelFace

Render = Callable[..., str]

AS_LEFT = """\
          circuit                    A │           circuit                    A
A *   1 ┌ 2nd hot of range             │ A     2   bath  漢字 bath           20
B *   3 └ range                     30 │ B     4   (vacant)
A     5   (vacant)                     │ A     6   hall                      20
B *   7   kitchen  Kitchen counte…  20 │ B    8a   desk                      15
                                       │ B    8b ┌ heater                    30
A     9 ┌ inlet                     30 │ A   10a └ 2nd hot of heater
                                       │ A   10b   porch                     15
B    11 └ 2nd hot of inlet             │ B   12a   lights                    15
                                       │ B   12b   pump                      15
A *  13   new                       20 │ A    14   (reserved)
"""


def test_face_shows_the_panel_as_it_hangs(installation: Installation, as_left: Arrangement, render: Render) -> None:
    assert render(PanelFace(installation, as_left, ["kitchen", "range", "new"])) == AS_LEFT


@pytest.mark.parametrize("width", [60, 80, 100])
def test_face_keeps_to_the_width(installation: Installation, as_left: Arrangement, render: Render, width: int) -> None:
    lines = render(PanelFace(installation, as_left), width).splitlines()
    assert max(cell_len(line) for line in lines) <= width
    assert len({line.index("\u2502") for line in lines if "\u6f22" not in line}) == 1


def test_open_half_of_a_tandem_is_shown(installation: Installation, render: Render) -> None:
    arrangement = {"lights": parse_landing("12a")}
    assert "12b   (vacant half)" in render(PanelFace(installation, arrangement))


def test_two_circuits_on_one_terminal_are_both_shown(installation: Installation, render: Render) -> None:
    face = render(PanelFace(installation, {"hall": parse_landing("6"), "bath": parse_landing("6")}))
    assert " 6   bath" in face
    assert " 6   hall" in face


def test_legs_and_places_follow_the_panel_file(installation: Installation, render: Render) -> None:
    spaces = (Space(1, 0, 1, Leg.B), Space(2, 1, 1, Leg.A), Space(3, 1, 2, Leg.B))
    odd = replace(installation, panel=Panel(spaces=spaces))
    lines = render(PanelFace(odd, {"hall": parse_landing("3")})).splitlines()
    assert lines[1].startswith("B     1")
    assert "\u2502 A     2" in lines[1]
    assert "\u2502 B     3   hall" in lines[2]
    assert lines[2].startswith("     ")


def test_numbers_down_the_columns_hang_where_they_belong(installation: Installation, render: Render) -> None:
    down = replace(installation, panel=Panel(spaces=ordinary_spaces(4, numbered_down=True)))
    lines = render(PanelFace(down, {})).splitlines()
    assert "A     1" in lines[1]
    assert "A     3" in lines[1]
    assert "B     2" in lines[2]
    assert "B     4" in lines[2]

"""Files in and out: inventory, panel, scenarios and profiles are read here, the as-left inventory is written."""

from balancer.files.blank import blank_inventory_text, blank_panel_text
from balancer.files.export import save_inventory
from balancer.files.inventory import read_inventory
from balancer.files.panel_file import ordinary_panel, read_panel_file
from balancer.files.profile_file import read_profiles
from balancer.files.readings import ReadingsLog, read_readings
from balancer.files.readings_report import LogReport
from balancer.files.scenario_file import read_scenarios

__all__ = [
    "LogReport",
    "ReadingsLog",
    "blank_inventory_text",
    "blank_panel_text",
    "ordinary_panel",
    "read_inventory",
    "read_panel_file",
    "read_profiles",
    "read_readings",
    "read_scenarios",
    "save_inventory",
]

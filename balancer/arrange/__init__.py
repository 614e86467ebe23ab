"""The arrangement: which circuit goes where, how good that is, and what to do at the panel."""

from balancer.arrange.plan import plan_arrangement
from balancer.arrange.results import Aim, Options, Plan, Tradeoff
from balancer.arrange.tradeoff import trade_landings

__all__ = ["Aim", "Options", "Plan", "Tradeoff", "plan_arrangement", "trade_landings"]

"""Solver-free re-check of every plan before it is shown.

It knows nothing of units, seats or the arrangement model: it judges landings and figures by the installation and the
options alone, so that a fault of the model is caught and not repeated.
"""

from __future__ import annotations

from collections.abc import Sequence

from balancer.arrange.proposal import Proposal
from balancer.arrange.results import Options, Plan
from balancer.arrange.verify_figures import FIGURE_CHECKS, Figures
from balancer.arrange.verify_moves import MOVE_CHECKS
from balancer.arrange.verify_places import LISTING_CHECKS, PLACE_CHECKS
from balancer.errors import SelfCheckError
from balancer.panel import Arrangement, Installation


def verify_plan(plan: Plan) -> None:
    """Judge a plan's landings and figures.

    Raises
    ------
    SelfCheckError
        When anything is wrong, with all that is: a bug of ours.
    """
    details = verify_arrangement(plan.installation, plan.options, plan.as_left, plan.removed_spares)
    # Figures of landings that the panel cannot have would say nothing.
    if not details:
        proposal = Proposal(plan.installation, plan.options, plan.as_left, plan.removed_spares)
        figures = Figures(plan, proposal)
        details = [sentence for check in FIGURE_CHECKS for sentence in check(figures)]
    if details:
        raise SelfCheckError(details)


def verify_arrangement(
    installation: Installation, options: Options, as_left: Arrangement, removed_spares: Sequence[str] = ()
) -> list[str]:
    """Judge landings as left; give a sentence for everything that is wrong with them."""
    proposal = Proposal(installation, options, as_left, tuple(removed_spares))
    listing = [sentence for check in LISTING_CHECKS for sentence in check(proposal)]
    # The other checks look up spaces and poles that must exist.
    if listing:
        return listing
    return [sentence for check in (*PLACE_CHECKS, *MOVE_CHECKS) for sentence in check(proposal)]

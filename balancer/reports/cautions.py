"""What every plan begins and ends with: the work is on equipment that can kill."""

from __future__ import annotations

LIVE_WORK = "The panel is live and open: only a qualified person, protected against shock and arc flash."
"""Stands before every test with the clamp meter."""

BEFORE = (
    "Shut off and lock out every source that can feed this panel: utility, solar, battery, generator. A generator or "
    "a battery may start by itself when the main opens: disable its automatic start first.",
    "Prove the bus dead, leg to leg and each leg to neutral and to ground, with a meter that you try on a live part "
    "just before and again just after.",
    "The line-side lugs of the main stay live. Only the utility can make them dead.",
    "The steps below are for a dead panel. Label every conductor before it leaves its terminal.",
)

AFTER = (
    "Keep each neutral with its own circuit, and the two hots of a shared neutral on opposite legs.",
    "Torque every terminal to the value on its label (NEC 2023, 110.14(D), from memory).",
    "Replace the panel's directory with the one above (NEC 2023, 408.4(A)): every circuit, the spares too.",
    "Before the main goes on again: dead front or cover ready, every branch breaker off; then switch on one by one.",
    "Check with the clamp meter. Electronics may raise the readings: their odd harmonics cancel between legs 180 "
    "degrees apart as the fundamental does, even ones add, and neither is in these figures. A water pipe or a ground "
    "electrode may carry part of a service's neutral current.",
    "Local code, the authority having jurisdiction and a licensed electrician decide.",
)

AFTER_NO_WORK = AFTER[-2:]
"""What is left to say where nothing is moved."""

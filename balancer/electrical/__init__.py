"""What flows: supplies, scenarios, leg amps and neutral current."""

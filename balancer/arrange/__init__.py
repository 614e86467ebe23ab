"""The arrangement: which circuit goes where, how good that is, and what to do at the panel.

Nothing is imported here: the planner brings in a solver that takes most of a second to load, and the steps, the clamp
check and the explanations do without it.
"""

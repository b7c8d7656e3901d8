"""How good could any plan be? Each argument in a file of its own, all in one registry."""

from search.efficiency.bounds.registry import ARGUMENTS, Argument, all_bounds, best_bound

__all__ = ["ARGUMENTS", "Argument", "all_bounds", "best_bound"]

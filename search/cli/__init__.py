"""The roof: parse, call, print; no decisions."""

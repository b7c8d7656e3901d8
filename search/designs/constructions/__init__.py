"""Constructions of balanced designs, one family a file; the registry is `search.designs.building`."""

"""Evenfield: near-balanced and A/D-optimal incomplete block plans for field trials."""

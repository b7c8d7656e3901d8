"""Proof by exhaustion: every graph that a better plan could have is looked at."""

"""A proof by exhaustion, repeated: other listing, other refutation, exact comparison."""

"""The reference replication against trying every replication."""

from __future__ import annotations

from collections.abc import Iterator
from fractions import Fraction
from itertools import product as all_of
from math import prod

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from search.efficiency.reference import (
    best_for_trace,
    give_out,
    least_worst_pair,
    mean_variance,
    product,
    reference_product,
    reference_replication,
)
from search.trial.records import AimKind, Block, Treatment, Trial
from tests.efficiency.plans import OVERALL, equal_trial

Ranges = list[tuple[int, int]]

ranges = st.lists(
    st.tuples(st.integers(1, 4), st.integers(0, 4)).map(lambda x: (x[0], x[0] + x[1])),
    min_size=2,
    max_size=5,
)


def _replications(stated: Ranges, n: int) -> Iterator[tuple[int, ...]]:
    for r in all_of(*(range(low, high + 1) for low, high in stated)):
        if sum(r) == n:
            yield r


def _trial(stated: Ranges, n: int) -> Trial:
    treatments = tuple(Treatment(f"T{i}", low, high) for i, (low, high) in enumerate(stated))
    return Trial("ranges", treatments, (Block("one", n),))


@settings(max_examples=150, deadline=None)
@given(ranges, st.data())
def test_no_replication_is_better(stated: Ranges, data: st.DataObject) -> None:
    """Least Σ W_ii/r_i, greatest Πr and least worst pair, each against all replications within the ranges."""
    n = data.draw(st.integers(sum(low for low, _ in stated), sum(high for _, high in stated)))
    everything = list(_replications(stated, n))
    trial = _trial(stated, n)
    diagonal = data.draw(
        st.lists(st.fractions(0, 3, max_denominator=5), min_size=len(stated), max_size=len(stated))
    )
    least, most = [low for low, _ in stated], [high for _, high in stated]
    best = best_for_trace(diagonal, least, most, n)
    assert best in everything
    assert mean_variance(diagonal, best) == min(mean_variance(diagonal, r) for r in everything)
    assert reference_product(trial) == max(product(r) for r in everything)
    worst = [sum(sorted((Fraction(1, x) for x in r), reverse=True)[:2]) for r in everything]
    assert least_worst_pair(trial) == min(worst)


def test_ties_are_settled_the_same_way_every_time() -> None:
    """Where no plot helps, as with weights of 0, plots are still given out evenly, low numbers first."""
    assert give_out([1, 1, 1], [5, 5, 5], 8, lambda i, r: Fraction(0)) == (3, 3, 2)


def test_ranges_that_cannot_give_the_sum_are_refused() -> None:
    """Too few and too many plots raise; the boundary does not."""
    gain = lambda i, r: Fraction(1, r)  # noqa: E731
    assert give_out([1, 1], [2, 2], 4, gain) == (2, 2)
    assert give_out([1, 1], [2, 2], 2, gain) == (1, 1)
    for plots in (1, 5):
        with pytest.raises(ValueError, match="cannot sum"):
            give_out([1, 1], [2, 2], plots, gain)


def test_the_product_is_the_determinant_without_blocks() -> None:
    """pdet(R − rr'/n) = Πr · t/n (closed form)."""
    trial = equal_trial(6, 4, 3, OVERALL)
    assert reference_replication(trial) == (2,) * 6
    assert reference_product(trial) == Fraction(prod((2,) * 6) * 6, 12)
    assert reference_replication(trial, AimKind.ALL_PAIRS) == (2,) * 6

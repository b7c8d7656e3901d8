"""How soon the search gets where it should: `pytest -m slow -s tests/solvers/test_targets.py`.

Two workers; the clock starts when the kernel is loaded; eight of ten seeds must keep the time.
"""

from __future__ import annotations

import pytest

from search.foundation.stopping import Limits
from search.runs.conductor import find
from search.runs.plan import Standing
from search.solvers.compiled import warm_up
from search.trial.reading import trial_from_document
from tests.solvers.problems import plain
from tests.solvers.test_rounds import found, variance_of

BALANCED = [(7, 7, 3), (9, 12, 3), (13, 13, 4), (15, 15, 7), (8, 14, 4)]
LARGER = [(31, 31, 6), (25, 30, 5)]


def balanced_efficiency(t: int, b: int, k: int) -> float:
    """E = λt/(rk) with λ = r(k−1)/(t−1), Yates 1936."""
    r = b * k // t
    return (r * (k - 1) / (t - 1)) * t / (r * k)


@pytest.mark.slow
@pytest.mark.parametrize(
    ("t", "b", "k", "efficiency", "seconds"),
    [
        *((t, b, k, balanced_efficiency(t, b, k), 2.0) for t, b, k in BALANCED),
        *((t, b, k, balanced_efficiency(t, b, k), 1.0) for t, b, k in LARGER),
        (12, 15, 4, 0.810160, 2.0),
        (30, 30, 5, 0.81534, 10.0),
    ],
)
def test_the_target_is_reached_in_time(t: int, b: int, k: int, efficiency: float, seconds: float) -> None:
    """Eight of ten seeds reach the efficiency within the seconds."""
    warm_up()
    problem, start = plain(t, b, k)
    goal = variance_of(efficiency, b * k // t)
    outcomes = [
        found(problem, start, seconds=seconds, seed=seed, target=lambda _: goal) for seed in range(10)
    ]
    taken = sorted(x.seconds for x in outcomes if x.objective <= goal * (1 + 1e-9))
    print(f"\n{(t, b, k)} A >= {efficiency:.6f}: {len(taken)} of 10, seconds {[round(x, 3) for x in taken]}")
    assert len(taken) >= 8


@pytest.mark.slow
@pytest.mark.parametrize(("t", "b", "k"), [*LARGER, (21, 30, 7)])
def test_a_balanced_plan_is_made_within_a_second_of_search(t: int, b: int, k: int) -> None:
    """With designs to start from, as `plan` has them; chance alone does not come upon (21, 30, 7)."""
    warm_up()
    trial = trial_from_document({"trial": "large", "treatments": t, "blocks": {"count": b, "plots": k}})
    for seed in range(3):
        plan = find(trial, limits=Limits(seconds=5), seed=seed, workers=2)
        print(f"\n{(t, b, k)}, seed {seed}: {plan.standing.value} after {plan.seconds:.2f} s")
        assert plan.standing is Standing.BALANCED
        assert plan.seconds < 1

"""The standing of a plan in plain words, true to the last digit."""

from __future__ import annotations

from typing import Any

from hypothesis import given
from hypothesis import strategies as st

from search.field.standing import standing_in_words


def words(standing: str, gap: float | None, connected: bool = True, plots: int = 47) -> str:
    """The sentences for a plan with the figures given."""
    score = {"aim": 0.812, "average_pair_variance": 0.5 if connected else None}
    document: dict[str, Any] = {"trial": {}, "score": score, "gap_percent": gap, "standing": standing}
    return " ".join(standing_in_words(document, plots))


def test_a_gap_is_told_as_gain_and_as_plots() -> None:
    """0.84 % below the bound: by hand, 1/0.9916 − 1 = 0.847 % to gain, 47 × 0.9916 = 46.6 plots."""
    told = words("bounded", 0.84)
    assert "more than 0.85 % better" in told
    assert "46.6 of 47 plots" in told
    assert "Its efficiency is 81.2 %" in told


def test_each_standing_says_no_more_than_is_known() -> None:
    """Balanced, proven, bounded, feasible and disconnected each have words of their own."""
    assert "balanced" in words("balanced", 0.0)
    assert "one part in a million" in words("proven optimal", 5e-5)
    assert "not known" in words("feasible", None)
    assert "proved" not in words("feasible", None)
    assert "cannot be compared" in words("feasible", None, connected=False)


def test_a_proof_by_exhaustion_is_called_that() -> None:
    """With its counts, and how to repeat it; raw values that are none are not told."""
    counts = {"graphs": 4207, "better": 3}
    document: dict[str, Any] = {
        "trial": {},
        "score": {"aim": 0.5, "average_pair_variance": 0.7},
        "gap_percent": 0.0,
        "standing": "proven optimal",
        "bound": {"certificate": {"kind": "exhaustion", "multipliers": counts}},
    }
    told = " ".join(standing_in_words(document, 48))
    assert "proved by exhaustion" in told
    assert "all 4,207 graphs" in told
    assert "3 would be better and were shown to be impossible" in told
    assert "verify --exhaust" in told
    counts["graphs"] = "many"  # type: ignore[assignment]
    assert "graphs" not in " ".join(standing_in_words(document, 48))


@given(st.floats(1e-4, 60), st.integers(2, 5000))
def test_rounding_never_flatters(gap: float, plots: int) -> None:
    """The gain that is told is at least the true one, the plots at most."""
    told = words("bounded", gap, plots=plots)
    gain = float(told.split("more than ")[1].split(" %")[0])
    worth = float(told.split("as good as ")[1].split(" of")[0])
    assert gain >= 100 * (1 / (1 - gap / 100) - 1) - 1e-9
    assert worth <= plots * (1 - gap / 100) + 1e-9

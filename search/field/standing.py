"""How good a plan is, in words for somebody who will stand in the field with it."""

from __future__ import annotations

from math import ceil, floor
from typing import Any

EVEN_MEETINGS = "even meetings"


def plots_planted(document: dict[str, Any]) -> int:
    """Plots of a plan that hold a treatment; the others are filler."""
    return sum(plot["treatment"] is not None for plot in document["plots"])


def standing_in_words(document: dict[str, Any], plots: int) -> tuple[str, ...]:
    """What is known of a plan, each sentence true as it stands.

    Parameters
    ----------
    document : the plan as in plan.json
    plots : plots that hold a treatment
    """
    score, gap, standing = document["score"], document["gap_percent"], document["standing"]
    if score["average_pair_variance"] is None:
        return (
            "This plan falls into parts that share no block: treatments of one part cannot be "
            "compared with those of another.",
        )
    if document["trial"].get("aim") == EVEN_MEETINGS:
        return _in_meetings(document)
    obeys = f"The plan obeys every rule of the trial. Its efficiency is {100 * score['aim']:.1f} %."
    if standing == "balanced":
        return (
            obeys,
            "It is balanced: every two treatments are compared equally well, and no plan under "
            "these rules is better.",
        )
    how = _exhaustion(document.get("bound"))
    if standing == "proven optimal":
        best = "No plan under these rules is better by even one part in a million; that is proved"
        return (obeys, f"{best} by exhaustion.", how) if how else (obeys, f"{best}.")
    if standing == "bounded" and gap is not None and 0 <= gap < 100:
        return (obeys, *_within(gap, plots), *([how] if how else []))
    return (obeys, "How much better another plan could be is not known.")


def _in_meetings(document: dict[str, Any]) -> tuple[str, ...]:
    """The same where meetings are counted: the gap is no share of the plots, so none is told in plots."""
    score, gap, standing = document["score"], document["gap_percent"], document["standing"]
    told = f"Its meetings, squared and summed over all pairs of treatments, come to {score['aim']}"
    obeys = f"The plan obeys every rule of the trial. {told}; a lower sum is more even."
    if standing == "balanced":
        return (
            obeys,
            "It is balanced: every two treatments meet equally often and are compared equally well, and no "
            "plan under these rules is better.",
        )
    if standing == "proven optimal":
        return (obeys, "No plan under these rules has a lower sum; that is proved.")
    if standing == "bounded" and gap is not None:
        least = document["bound"]["value"]
        return (obeys, f"No plan under these rules has a sum below {least}; that is proved.")
    return (obeys, "How much more even another plan could be is not known.")


def _exhaustion(bound: Any) -> str:
    """What a proof by exhaustion rests on; empty where the bound is of another kind."""
    certificate = bound.get("certificate") if isinstance(bound, dict) else None
    if not isinstance(certificate, dict) or certificate.get("kind") != "exhaustion":
        return ""
    counts = certificate.get("multipliers")
    graphs, better = (counts.get(key) for key in ("graphs", "better")) if isinstance(counts, dict) else (0, 0)
    if not (isinstance(graphs, int) and isinstance(better, int)):
        return ""
    fate = f"{better:,} would be better and were shown to be impossible" if better else "none is better"
    return (
        f"Proof by exhaustion: all {graphs:,} graphs of the most even meetings were looked at by computer; "
        f"{fate}. All that is less even is bounded. To repeat it: evenfield verify --exhaust."
    )


def _within(gap_percent: float, plots: int) -> tuple[str, str]:
    """The gap as the most that could be gained and as plots; both are rounded to the safe side."""
    reached = 1 - gap_percent / 100
    gain = ceil(1e4 * (1 / reached - 1) - 1e-9) / 100
    worth = floor(10 * plots * reached + 1e-9) / 10
    return (
        f"No plan under these rules can be more than {gain:.2f} % better; that is proved.",
        f"Put another way: it is as good as {worth:g} of {plots} plots of the best possible plan.",
    )

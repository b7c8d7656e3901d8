"""Clashing lines of a file on a page."""

from __future__ import annotations

from collections.abc import Iterable, Iterator

from search.foundation.errors import Clash

MOST_LINES = 12
SHOWN_BY = {"count": "counting", "clique": "counting plots of treatments that never share a block"}
MOST_CHANGES = 8


def clash_lines(clash: Clash, alone: bool = True) -> Iterator[str]:
    """The paragraphs of one clash: its lines, why they clash, what to relax.

    Parameters
    ----------
    clash : the clash
    alone : whether the trial has no other one
    """
    if clash.lines:
        yield _head(clash)
        yield from _listed(clash.lines)
        yield "on what the file has to plant:"
    else:
        yield "The blocks cannot hold the treatments, whatever the rules:"
    yield from _listed(clash.among)
    yield f"Why: {clash.cause}."
    yield f"Shown by: {SHOWN_BY.get(clash.shown_by, clash.shown_by)}."
    if clash.changes:
        which = "Any one of these changes" if len(clash.changes) > 1 else "This change"
        serves = "serves" if alone else "serves here, while the other clashes must be mended too"
        yield f"{which} {serves} (each tried, smallest first):"
        yield from (f"  - {change}" for change in clash.changes[:MOST_CHANGES])
    else:
        yield "No change to a single line was found in the time that leaves a plan."


def _head(clash: Clash) -> str:
    if len(clash.lines) == 1:
        return "This line cannot be kept:"
    if clash.is_smallest:
        return "These lines cannot all be kept; without any one of them there is a plan:"
    return "These lines cannot all be kept (a clash, not shown to be smallest):"


def _listed(lines: Iterable[tuple[str, int, str]]) -> Iterator[str]:
    lines = list(lines)
    for _, number, text in lines[:MOST_LINES]:
        yield f"  {f'line {number}: ' if number else ''}{text}"
    if len(lines) > MOST_LINES:
        numbers = ", ".join(str(number) for _, number, _ in lines[MOST_LINES:] if number)
        yield f"  and {len(lines) - MOST_LINES} more{f': lines {numbers}' if numbers else ''}"

"""How many bays a bare map can be cut into, and of which sizes: as even as the count allows."""

from __future__ import annotations

from search.trial.kinds import Report, Section
from search.trial.nodes import Node
from search.trial.records import Block, Wanted


def read_wanted(section: Section | None, node: Node, plots: int, report: Report) -> Wanted | None:
    """What the file wants of the bays, or None after reporting why it cannot be had.

    Parameters
    ----------
    section : `blocks.wanted` as the grammar read it
    node : where it stands
    plots : plots on the map
    report : where faults go
    """
    if section is None:
        return None
    count, sizes = section.get("count"), section.get("plots")
    sizes = (sizes, sizes) if isinstance(sizes, int) else sizes
    if not section.where:
        report.add(node, "blocks.wanted", "nothing", "count: how many bays, or plots: [least, most] of each")
        return None
    if sizes is not None and (len(sizes) != 2 or sizes[0] > sizes[1]):
        report.add(section.where["plots"], "blocks.wanted.plots", f"{list(sizes)}", "[least, most]")
        return None
    wanted = Wanted(count, None if sizes is None else (sizes[0], sizes[1]))
    if (count is None and sizes is None) or counts(wanted, plots):
        return wanted if count is not None or sizes is not None else None
    asked = " and ".join(
        ([f"{count} bays"] if count else []) + ([f"bays of {sizes[0]} to {sizes[1]} plots"] if sizes else [])
    )
    report.add(
        node,
        "blocks.wanted",
        f"{asked} from {plots} plots",
        "bays that use every plot of the map once",
        "a plot outside all bays would be wasted, one in two would count twice",
        "a wider range of plots",
    )
    return None


def counts(wanted: Wanted, plots: int) -> tuple[int, ...]:
    """Every number of bays that fits, the fewest first."""
    least, most = wanted.plots or (1, plots)
    fitting = range(-(-plots // most), plots // least + 1)
    return tuple(count for count in fitting if wanted.count in (None, count))


def bays(wanted: Wanted, plots: int) -> tuple[Block, ...]:
    """The bays as planned before they are cut: the fewest that fit, since larger bays lose less."""
    count = counts(wanted, plots)[0]
    size, larger = divmod(plots, count)
    return tuple(Block(f"bay {j}", size + (j <= larger)) for j in range(1, count + 1))

"""Names of the file and the numbers they stand for."""

from __future__ import annotations

from collections.abc import Sequence

from search.foundation.errors import did_you_mean, shown
from search.trial.kinds import Report
from search.trial.nodes import Node


class Names:
    """Looks up names of one sort and reports those that nobody has.

    Parameters
    ----------
    sort : what they name, for messages
    names : in the order of their numbers
    """

    def __init__(self, sort: str, names: Sequence[str]) -> None:
        self.sort = sort
        self.numbers = {name: number for number, name in enumerate(names)}

    def __contains__(self, name: str) -> bool:
        return name in self.numbers

    def find(
        self, name: str, node: Node | None, key: str, report: Report, other: Names | None = None
    ) -> int | None:
        """The number of a name, or None after reporting it; `other` is a sort it may be mistaken for."""
        number = self.numbers.get(name)
        if number is None:
            remedy = did_you_mean(name, self.numbers)
            if other is not None and name in other:
                remedy = f"{shown(name)} is a {other.sort}: the two sides may be turned round"
            report.add(
                node,
                key,
                shown(name),
                f"the name of a {self.sort} of this trial",
                "a rule about nobody would keep nothing",
                remedy,
            )
        return number

"""Names of the file and the numbers they stand for."""

from __future__ import annotations

import unicodedata
from collections.abc import Sequence

from search.foundation.errors import did_you_mean, shown
from search.trial.kinds import Report
from search.trial.nodes import Node


def plain(name: str) -> str:
    """A name without what a reader in the field overlooks: case, blanks, and how letters are composed."""
    return "".join(unicodedata.normalize("NFKC", name).split()).casefold()


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
        self.plain = {plain(name): name for name in names}

    def __contains__(self, name: str) -> bool:
        return name in self.numbers

    def find(
        self, name: str, node: Node | None, key: str, report: Report, other: Names | None = None
    ) -> int | None:
        """The number of a name, or None after reporting it; `other` is a sort it may be mistaken for."""
        number = self.numbers.get(name)
        if number is None:
            twin = self.plain.get(plain(name))
            remedy = f'"{twin}", letter for letter' if twin else did_you_mean(name, self.numbers)
            remedy = remedy or f"one of: {', '.join(list(self.numbers)[:8])}"
            if other is not None and name in other:
                remedy = f"{shown(name)} is a {other.sort}: the two sides may be turned round"
            report.add(
                node,
                key,
                shown(name),
                f"the name of a {self.sort} of this trial",
                "a rule about a name that nobody has would keep nothing",
                remedy,
            )
        return number

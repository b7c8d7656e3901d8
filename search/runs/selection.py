"""Which of the kept results are meant: by name, size, aim, standing, gap and age."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import UTC, datetime, timedelta
from typing import Any

from search.runs.kept import moment
from search.runs.summary import folded


@dataclass(frozen=True, slots=True)
class Selection:
    """Some of the kept results; what is None, or empty, leaves all of them.

    Parameters
    ----------
    name : a part of the trial's name, in small or capital letters
    treatments, blocks : fewest and most of them
    aim, standing : one of their words
    gap_least, gap_most : in per cent; results without a bound have no gap
    older_days, newer_days : age of the plan
    issued : whether a plan of it was ever issued
    """

    name: str = ""
    treatments: tuple[int, int] | None = None
    blocks: tuple[int, int] | None = None
    aim: str = ""
    standing: str = ""
    gap_least: float | None = None
    gap_most: float | None = None
    older_days: float | None = None
    newer_days: float | None = None
    issued: bool | None = None

    @property
    def is_everything(self) -> bool:
        """Whether nothing is left out."""
        return self == Selection()

    def condition(self) -> tuple[str, dict[str, Any]]:
        """A condition on the short lines of the store, with its values."""
        terms: dict[str, dict[str, Any]] = {}
        if self.name:
            terms["instr(folded, :name) > 0"] = {"name": folded(self.name)}
        for column, key, span in (("t", "treatments", self.treatments), ("b", "blocks", self.blocks)):
            if span is not None:
                least, most = span
                terms[f"{column} BETWEEN :least_{key} AND :most_{key}"] = {
                    f"least_{key}": least,
                    f"most_{key}": most,
                }
        if self.aim:
            terms["aim = :aim"] = {"aim": self.aim}
        if self.standing:
            terms["standing = :standing"] = {"standing": self.standing}
        if self.gap_least is not None:
            terms["gap >= :gap_least"] = {"gap_least": self.gap_least}
        if self.gap_most is not None:
            terms["gap <= :gap_most"] = {"gap_most": self.gap_most}
        if self.older_days is not None:
            terms["+made < :older"] = {"older": _days_ago(self.older_days)}
        if self.newer_days is not None:
            terms["+made >= :newer"] = {"newer": _days_ago(self.newer_days)}
        if self.issued is not None:
            there = "(digest, aim) IN (SELECT digest, aim FROM issued)"
            terms[there if self.issued else f"NOT {there}"] = {}
        values = {key: value for held in terms.values() for key, value in held.items()}
        return " AND ".join(terms) or "TRUE", values


EVERYTHING = Selection()


def _days_ago(days: float) -> str:
    return moment(datetime.now(UTC) - timedelta(days=days))

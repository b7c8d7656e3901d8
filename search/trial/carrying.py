"""Plans and certificates carried into the canonical numbering of a trial, and back out of it."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

from search.trial.canonical import Canonical
from search.trial.records import Contents


@dataclass(frozen=True, slots=True)
class Carrier:
    """Renumbers what speaks of treatments, blocks, replicates or contrasts by number.

    Parameters
    ----------
    treatments, replicates : new number of each
    blocks, contrasts : old number at each new place
    """

    treatments: tuple[int, ...]
    replicates: tuple[int, ...]
    blocks: tuple[int, ...]
    contrasts: tuple[int, ...]

    def contents(self, contents: Contents) -> Contents:
        """Block contents in the new numbering.

        Raises
        ------
        IndexError : they name a treatment that the trial does not have, or have other blocks
        """
        if len(contents) != len(self.blocks):
            raise IndexError(len(contents))
        return tuple(tuple(sorted(_at(self.treatments, i) for i in contents[j])) for j in self.blocks)

    def certificate(self, certificate: dict[str, Any]) -> dict[str, Any]:
        """A certificate in the new numbering.

        Lists under `treatments`, numbers under `group` and `with` (replicates, -1 for outside), `roots`
        and `matrix` (in the order of the contrasts) are renumbered; all else stays as it is.

        Raises
        ------
        IndexError, TypeError : it speaks of numbers that the trial does not have
        """
        carried: dict[str, Any] = self._carried(certificate)
        return carried

    def _carried(self, value: Any) -> Any:
        if isinstance(value, dict):
            return {key: self._renumbered(key, held) for key, held in value.items()}
        if isinstance(value, list):
            return [self._carried(item) for item in value]
        return value

    def _renumbered(self, key: str, value: Any) -> Any:
        match key:
            case "treatments":
                return sorted(_at(self.treatments, i) for i in value)
            case "group" | "with":
                return -1 if value == -1 else _at(self.replicates, value)
            case "roots":
                return [value[c] for c in self.contrasts]
            case "matrix":
                return [[value[c][d] for d in self.contrasts] for c in self.contrasts]
        return self._carried(value)


def to_canonical(numbering: Canonical) -> Carrier:
    """From the trial's own numbers to canonical places."""
    return Carrier(
        treatments=_inverse(numbering.treatments),
        replicates=_inverse(numbering.replicates),
        blocks=numbering.blocks,
        contrasts=numbering.contrasts,
    )


def from_canonical(numbering: Canonical) -> Carrier:
    """From canonical places to the trial's own numbers."""
    return Carrier(
        treatments=numbering.treatments,
        replicates=numbering.replicates,
        blocks=_inverse(numbering.blocks),
        contrasts=_inverse(numbering.contrasts),
    )


def _inverse(order: Sequence[int]) -> tuple[int, ...]:
    places = [0] * len(order)
    for place, number in enumerate(order):
        places[number] = place
    return tuple(places)


def _at(numbers: tuple[int, ...], at: int) -> int:
    # A negative number would quietly count from the end.
    if at < 0:
        raise IndexError(at)
    return numbers[at]

"""Kind "exhaustion": every graph of the first level was looked at, all further levels are bounded.

What is derived here takes the listing of graphs and the refutation of the better ones on the word of the
file; `search.proof.exhaustion` repeats both on demand. The further levels are proved again in any case.
"""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction

from search.proof.certificates.case import Case
from search.proof.certificates.claims import Claim, claim_of_determinant, claim_of_variance
from search.proof.certificates.local_spectral import MOST_LEVELS, claim_of_costs, level_values
from search.proof.certificates.multipliers import known
from search.proof.certificates.spectral.numbers import EVEN, Numbers, Side, numbers_of, pairs_of_sides
from search.proof.parts import Part
from search.proof.records import Refuted
from search.trial.records import AimKind

KIND = "exhaustion"
AIMS = (AimKind.ALL_PAIRS, AimKind.OVERALL)
KEYS = ("side", "graphs", "better", "refuted", "worth", "levels", "because")


@dataclass(frozen=True, slots=True)
class Listing:
    """What the file says was listed.

    Parameters
    ----------
    numbers : of the trial
    side, other : the side whose graphs were listed, and the one of its lines
    both_even : whether overlaps of lines are as even as can be too
    worth : no plan of the first level is said to have more; see `search.proof.exhaustion.repeat`
    graphs, better : graphs in all, and those with more worth
    by_counting, by_solver, by_literature : how these were refuted
    because : the reason in the literature, empty where none was needed
    """

    numbers: Numbers
    side: Side
    other: Side
    both_even: bool
    worth: Fraction
    graphs: int
    better: int
    by_counting: int
    by_solver: int
    by_literature: int
    because: str

    @property
    def told(self) -> str:
        """The counts in words."""
        ways = "treatments meet" if self.side.members == self.numbers.t else "blocks overlap"
        fates = {
            "counting": self.by_counting,
            "the solver": self.by_solver,
            "the literature": self.by_literature,
        }
        refuted = ", ".join(f"{count:,} by {by}" for by, count in fates.items() if count)
        return (
            f"{self.graphs:,} graphs of how {ways}, {self.better:,} better than the plan"
            + (f", refuted: {refuted}" if refuted else "")
            + (f" ({self.because})" if self.because else "")
        )


def listing_of(case: Case, multipliers: Part) -> Listing:
    """What the file says was listed, as far as its numbers agree with each other and with the trial."""
    known(multipliers, KEYS)
    numbers = numbers_of(case)
    if numbers.r == numbers.k == 2:
        raise Refuted("with two plots a block and two a treatment nothing is listed")
    sides = pairs_of_sides(numbers, 0, True)
    name = multipliers.text("side")
    if not sides or name not in ("primal", "dual"):
        raise Refuted(f"{multipliers.at('side')} must be primal or dual")
    # the other side may have several forms there, where it is not even
    side, other = sides[0] if name == "primal" else sides[0][::-1]
    if side.form != EVEN or side.sets > 1:
        raise Refuted(f"{multipliers.where} lists graphs of a side that is no graph")
    refuted = multipliers.part("refuted")
    graphs, better = multipliers.whole("graphs"), multipliers.whole("better")
    fates = [refuted.whole(key) for key in ("counting", "solver", "literature")]
    if min(fates) < 0 or sum(fates) != better or not better <= graphs or graphs < 0:
        raise Refuted(f"{multipliers.where} counts graphs that do not add up")
    if fates[2] and (side.d or not multipliers.has("because")):
        raise Refuted(f"{refuted.at('literature')} speaks of balanced designs alone, and must say why")
    return Listing(
        numbers=numbers,
        side=side,
        other=other,
        both_even=other.form == EVEN and other.sets == 1,
        worth=multipliers.ratio("worth"),
        graphs=graphs,
        better=better,
        by_counting=fates[0],
        by_solver=fates[1],
        by_literature=fates[2],
        because=multipliers.text("because") if fates[2] else "",
    )


def derive(case: Case, multipliers: Part) -> Claim:
    """The lesser of what is claimed of the first level and what is proved of all others."""
    listing = listing_of(case, multipliers)
    numbers = listing.numbers
    if not 1 <= len(multipliers.items("levels")) <= MOST_LEVELS:
        raise Refuted(f"{multipliers.at('levels')} must list the further levels, {MOST_LEVELS} at most")
    values = list(level_values(case, numbers, multipliers, 1))
    if not values:
        raise Refuted("the certificate has no further level that a plan could have")
    further = claim_of_costs(case, numbers, min(values))
    if case.aim is AimKind.OVERALL:
        if listing.worth <= 0:
            raise Refuted(f"{multipliers.at('worth')} must be above 0")
        first = claim_of_determinant(case, listing.worth * numbers.r**case.rank)
    else:
        first = claim_of_variance(case, -2 * listing.worth / numbers.r / case.rank)
    return max(first, further, key=lambda claim: claim.ratio)

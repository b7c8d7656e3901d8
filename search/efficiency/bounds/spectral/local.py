"""Local spectral: the eigenvalues of a plan must fit whole numbers of meetings and of walks.

Statement. Let all blocks have k plots and all treatments r, nothing twice in a block. With ρ = rk·x the
eigenvalues of NN' beside the trivial one, an eigenvalue of C is r(1 − x), and `Σ 1/(1 − x)` (or
`−Σ log(1 − x)`) over all t − 1 of them is not below the least value of the levels.

Proof. Let a polynomial p lie below the cost of an eigenvalue on [0, 1). Then Σ cost ≥ Σ p(x), which is a sum
of traces: p is put together from powers up to the fourth of the meetings M of treatments and of those of
blocks (both have the eigenvalues ρ), and, with prices not below 0, from polynomials that count closed walks
without turning back. `tr M³ = Σ m_ij c_ij` and `tr M⁴ = Σ c_ij²`, C = M², are sums over pairs of members;
with prices on what rows sum to, each pair costs at least the least over all whole (m, c) that it could have.
The distance of the meetings from even is a whole number of steps; each of the first levels is bounded for
itself, with all that is known of M there (a graph, a graph but for one pair), the last for all further ones.
Where the graph of a level, or what it leaves of all pairs, has a degree of at most 2, every graph is looked
at instead. In a level one may split: at most q of the eigenvalues have x ≤ y, or at least q + 1 have.

Source. Eigenvalues and walk counts: Delsarte 1973 and Biggs 1974 (from memory); levels and prices: this
project.
"""

from __future__ import annotations

from dataclasses import dataclass, field, replace
from fractions import Fraction
from typing import Any

from search.efficiency.bounds.problem import Problem, bound_on_determinant, bound_on_variance, text
from search.efficiency.bounds.spectral.below import Cost
from search.efficiency.bounds.spectral.cycles import Listed, listed
from search.efficiency.bounds.spectral.leaf import Leaf, solved
from search.efficiency.bounds.spectral.model import Model
from search.efficiency.bounds.spectral.side import Shape, Side, shape_of, steps_of, variants
from search.efficiency.records import Bound
from search.foundation.exact import exponential_above
from search.trial.records import AimKind, Trial

NAME = "local spectral"
SENTENCE = (
    "Meetings of treatments, overlaps of blocks, and the ways that lead from one to the next over "
    "several blocks are all whole numbers; no set of variances that disagrees with them can occur."
)
FINER = "local spectral, split further"
FINER_SENTENCE = (
    "The same, with plans sorted by how far their meetings are from even and by how many differences "
    "are badly measured, and each sort looked at for itself."
)
STEPS = 8
"""Levels and splits that the finer bound adds at most."""
MOST_LEVELS = 8
LOW_PENALTY = 0.3


def applies(trial: Trial) -> bool:
    """Whether the aim depends on the eigenvalues alone and nothing may stand twice in a block."""
    return trial.aim.kind.depends_on_eigenvalues and not trial.rules.twice_in_block


def find(given: Problem) -> Bound | None:
    """The bound from one level and all further ones; None where blocks or replications differ."""
    return _bound(given, NAME, 0)


def find_finer(given: Problem) -> Bound | None:
    """The bound after more levels and splits."""
    return _bound(given, FINER, STEPS)


def _bound(given: Problem, argument: str, steps: int) -> Bound | None:
    shape = shape_of(given)
    search = None if shape is None else begun(shape, _cost(given))
    if shape is None or search is None:
        return None
    for _ in range(steps):
        if not search.step():
            break
    if not search.leaves:
        return None
    least, multipliers = search.value, {"levels": [level.multipliers() for level in search.levels]}
    if least <= 0:
        return None
    if given.trial.aim.kind is AimKind.OVERALL:
        greatest = exponential_above(-least) * shape.r**shape.rank
        return bound_on_determinant(given, argument, greatest, multipliers, kind=NAME)
    variance = 2 * least / shape.r / shape.rank
    return bound_on_variance(given, argument, variance, multipliers, kind=NAME)


def _cost(given: Problem) -> Cost:
    return Cost.LOGARITHM if given.trial.aim.kind is AimKind.OVERALL else Cost.INVERSE


@dataclass(slots=True)
class Level:
    """One level: for each form that it can have the leaves that cover it."""

    number: int
    exactly: bool
    forms: list[list[Leaf | Listed]]

    def multipliers(self) -> list[Any]:
        """For each form its leaves as a tree of splits."""
        return [_tree(leaves, 0) for leaves in self.forms]


@dataclass(slots=True)
class Search:
    """Levels and leaves, made finer step by step where the value is least."""

    shape: Shape
    cost: Cost
    levels: list[Level] = field(default_factory=list)

    @property
    def leaves(self) -> list[Leaf | Listed]:
        """All of them."""
        return [leaf for level in self.levels for leaves in level.forms for leaf in leaves]

    @property
    def value(self) -> Fraction:
        """What `Σ cost` is not below in any plan."""
        return min(leaf.value for leaf in self.leaves)

    def level(self, number: int, exactly: bool) -> Level | None:
        """A level, each of its forms solved; None where no plan has one or the solver fails."""
        forms = variants(self.shape, number, exactly)
        if forms is None:
            return None
        found = [self._leaf(sides, number if exactly else None) for sides in forms]
        leaves = [[leaf] for leaf in found if leaf is not None]
        return Level(number, exactly, leaves) if len(leaves) == len(found) else None

    def _leaf(self, sides: tuple[Side, Side], number: int | None) -> Leaf | Listed | None:
        """One form of a level, by its program or by looking at every graph, whichever proves more."""
        found: list[Leaf | Listed | None] = [
            solved(Model.of(self.shape, sides, self.cost))
            # where all eigenvalues are fixed, prices without much of a limit get out of hand
            or solved(Model.of(self.shape, sides, self.cost, LOW_PENALTY))
        ]
        if number is not None and self.cost is Cost.INVERSE:
            steps = steps_of(self.shape, number)
            found.append(None if steps is None else listed(self.shape, steps))
        return max((leaf for leaf in found if leaf is not None), key=lambda leaf: leaf.value, default=None)

    def step(self) -> bool:
        """One more level, or one more split; False where nothing can be made finer."""
        if not self.leaves:
            return False
        level, leaves, at = min(
            (
                (level, leaves, at)
                for level in self.levels
                for leaves in level.forms
                for at in range(len(leaves))
            ),
            key=lambda place: place[1][place[2]].value,
        )
        return self._split(leaves, at) if level.exactly else self._go_on()

    def _go_on(self) -> bool:
        """Take the first of all further levels out."""
        number = self.levels[-1].number
        exact, rest = self.level(number, True), self.level(number + 1, False)
        if number + 1 >= MOST_LEVELS or exact is None or rest is None:
            return False
        self.levels[-1:] = [exact, rest]
        return True

    def _split(self, leaves: list[Leaf | Listed], at: int) -> bool:
        leaf = leaves[at]
        split = leaf.split()
        if split is None or isinstance(leaf, Listed):
            return False
        children = [solved(leaf.model.split_at(part)) for part in (split, replace(split, few=False))]
        found = [leaf for leaf in children if leaf is not None]
        if len(found) < len(children):
            return False
        leaves[at : at + 1] = found
        return True


def begun(shape: Shape, cost: Cost) -> Search | None:
    """The first level, and all further ones together."""
    search = Search(shape, cost)
    first = search.level(0, True)
    # two treatments in both of their blocks would have no connection to the others
    rest = None if shape.r == shape.k == 2 else search.level(1, False)
    if first is None or (rest is None and not shape.r == shape.k == 2):
        return None
    search.levels = [first] if rest is None else [first, rest]
    return search


def beyond_first(shape: Shape, cost: Cost, enough: Fraction) -> Search | None:
    """All levels but the first, made finer until no plan in them costs less than `enough`, if they can be."""
    search = Search(shape, cost)
    rest = search.level(1, False)
    if rest is None or not rest.forms:
        return None
    search.levels = [rest]
    for _ in range(STEPS):
        if not search.leaves or search.value >= enough or not search.step():
            break
    return search if search.leaves else None


# -- what the checker needs --------------------------------------------------------------------------


def _tree(leaves: list[Leaf | Listed], depth: int) -> dict[str, Any]:
    splits = leaves[0].splits
    if len(splits) == depth:
        return leaves[0].multipliers()
    few = [leaf for leaf in leaves if leaf.splits[depth].few]
    many = [leaf for leaf in leaves if not leaf.splits[depth].few]
    at = {"at": text(splits[depth].at), "count": splits[depth].count}
    return {**at, "few": _tree(few, depth + 1), "many": _tree(many, depth + 1)}

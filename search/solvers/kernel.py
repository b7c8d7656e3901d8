"""The exchange kernel: legal moves, scored in O(1) each.

**Points and sets.** Treatments are points, blocks are sets of points: a set stands for the mean of what
it holds. `Metrics` holds `G = (C + J/t)⁻¹`, whose quadratic form is the variance of an estimated
difference, and `H = G W G`, the slope of the objective `tr(W C⁺)`: what more information on a difference
is worth. On a trial whose sides are turned (`sides.py`) blocks are the points and treatments the sets.

**Moves.** To exchange u (block a) with v (block c), or to plant v for u on a plot of block a, changes
the information by `d w' + w d' − s d d'` with `d = u − v` and

    exchange:  w = a − c,              s = 1/k_a + 1/k_c
    replace:   w = a − ½(u + v),       s = 1/k_a

With `α = d'Gd, β = d'Gw, γ = w'Gw + s` and `a, b, c = d'Hd, d'Hw, w'Hw`

    ratio = (1 + β)² − αγ                       pdet(C) grows by this factor
    rise  = (γ a − 2(1 + β) b + α c) / ratio    tr(W C⁺) grows by this much

Moves are scored in strips: one plot against many others at once, in a loop without branches. What G and
H have between a block and every treatment, the mean of its treatments' rows, is computed when a strip
needs it and kept until the next accepted move. Carried from move to move instead, it would cost more than
it brings, and so would products of blocks with each other, which are means of those.

**Accepted moves** cost O(t²). With `g = Gd`, `h = G(w − ½ s d)`, `p = Hd`, `q = H(w − ½ s d)`, and
α to c taken for `w − ½ s d` too, γ without s:

    G' = G + g x' + h y',   x = (γ g − (1 + β) h)/ratio,   y = (α h − (1 + β) g)/ratio
    H' = H + x s' + s x' + y z' + z y',   s = p + ½ a x + ½ b y,   z = q + ½ c y + ½ b x

The means that they are made of are summed afresh from the rows of both tables at every accepted move:
carried along, their error would grow by a constant factor each time.

One file on purpose: the compiler's cache does not notice a change in a function of another file.
Everything here also runs as plain Python, with NUMBA_DISABLE_JIT=1.
"""

from __future__ import annotations

from functools import cache, wraps
from typing import Any, NamedTuple

import numpy as np
from numba import njit, types

LEAST_RATIO = 1e-3
"""A move that shrinks pdet(C) further than this all but disconnects the plan: it is refused."""

NOTHING = 1e-12
"""A rise or a squared distance below this is nothing but rounding."""

STRIP = 64
"""Most moves of a plot that are scored in one go, by a scan."""

DRAWS = -np.log((np.arange(1024 + STRIP) * 619 % 1024 + 0.5) / 1024)
"""Quantiles of the exponential law: how far uphill a move may go, over the temperature. Steps near the
golden section: moves tried together are allowed to climb as differently as can be."""

FULL, PINNED = 1 << 20, 1 << 21
"""Flags in `Planting.gate`: no plot more, no plot less of the treatment in the block."""

FIRST, PLOTS, POOL_FIRST, POOL_PLOTS, REACH = range(5)
"""Columns of `Beds.blocks`: the first plot of a block and its number of plots; the first and the number
of the plots that it may exchange with (its replicate's, or all outside); that number and, outside
replicates, the number of loose treatments."""

LEAST, MOST = range(2)
"""Layers of the ranges in `Admitted`."""

FEWEST, MOST_LISTED = 8, 16
"""Partners that annealing lists at least and at most: twice as many after a block without an accepted move,
half as many after one with some, since every one makes the list stale."""

PULL_G, PULL_H, OWN_G, OWN_H, GAMMA, C_ = range(6)
"""Columns of a strip, each of STRIP numbers: what a move owes to the partner and its block. Pulls are what
G and H have between the partner and w."""

X_G, X_H, OF_G, OF_H, CLOSED, RISE, RATIO = range(6, 13)
"""What it owes to the plot too: entries of G and H, those between the treatment and the partner's block,
whether the move is illegal, and what comes of it: the rise times the ratio, and the ratio."""

POWERS, STRIP_COLUMNS = 13, 14
"""Powers of the cooling factor stand in the last column."""

PARTNER, POINT, BLOCK, ORDER = range(4)
"""Parts of `Metrics.listed`, each of STRIP numbers: partners, their treatments, their blocks, and which of
the plots or treatments looked at they were."""


class Beds(NamedTuple):
    """Where plots lie: those of a block side by side, and blocks of a replicate too."""

    home: Any
    """(n,) block of each plot"""
    blocks: Any
    """(b, 5) see FIRST and the other columns"""
    share: Any
    """(b,) one over the weight in the block: of its plots, and of the general mean"""
    loose: Any
    """treatments whose replication may change"""
    mean: float
    """Weight of the general mean in every block: 0 where blocks are fixed, else it is the last treatment"""


class Admitted(NamedTuple):
    """What the rules admit."""

    plots: Any
    """(2, t) range of plots of each treatment"""
    copies: Any
    """(2, b, t) range of plots of each treatment in each block"""
    meetings: Any
    """(2, t, t) range of blocks that a pair shares"""
    apart: Any
    """(t, t) 1 for pairs that never share a block"""
    any_apart: bool
    any_meetings: bool
    """Whether there are such pairs, and whether any other meetings are limited"""
    real: int
    """Treatments from this number on are filler: no block may hold nothing else"""


class Planting(NamedTuple):
    """The contents, and what legality asks of them."""

    planted: Any
    """(n,) treatment of each plot"""
    plots: Any
    """(t,) plots of each treatment"""
    copies: Any
    """(b, t) plots of each treatment in each block"""
    meetings: Any
    """(t, t) blocks that a pair shares; kept where `any_meetings`"""
    gate: Any
    """(b, t) plots of the block whose treatments never meet this one, with the flags FULL and PINNED"""
    room: Any
    """(t + b,) room for numbers of points"""


class Metrics(NamedTuple):
    """The two tables by which moves are scored; rows are filled up with zeros to a multiple of eight."""

    inverse: Any
    """(t, width) G"""
    worth: Any
    """(t, width) H; not kept where `overall`"""
    means: Any
    """(2, b, width) what G and H have between each block and the treatments, where up to date"""
    inner: Any
    """(2, b) what they have between each block and itself"""
    stamps: Any
    """(b + 1,) the accepted move at which that was up to date, and the last accepted one"""
    work: Any
    """(6, width) room for vectors"""
    strip: Any
    """(STRIP_COLUMNS * STRIP,) room for the columns of a strip"""
    listed: Any
    """(4 * STRIP,) room for its partners"""
    overall: bool
    """True where −log pdet(C)/degrees is wanted and not a trace"""
    degrees: float
    """Treatments less one, whichever side the points are"""


_I1, _I2, _I3 = types.int32[::1], types.int32[:, ::1], types.int32[:, :, ::1]
_U1, _U2 = types.uint32[::1], types.uint32[:, ::1]
_F1, _F2, _F3 = types.float64[::1], types.float64[:, ::1], types.float64[:, :, ::1]
_I8 = types.int64[::1]
_YES, _INT, _FLOAT = types.boolean, types.int64, types.float64
_RANDOM = types.uint64[::1]
_BOARD = types.Tuple(
    (
        types.Tuple((_U1, _U2, _F1, _U1, _FLOAT)),
        types.Tuple((_I2, _I3, _I3, _I2, _YES, _YES, _INT)),
        types.Tuple((_U1, _I1, _I2, _I2, _I2, _U1)),
        types.Tuple((_F2, _F2, _F3, _F2, _I8, _F2, _F1, _U1, _YES, _FLOAT)),
    )
)

# No function here makes or keeps an array, so none counts references to arrays (`_nrt`): counting is
# atomic and would take nine tenths of the time. Numba compiles its own sorting in this way.
_plainly = {"nogil": True, "error_model": "numpy", "_nrt": False}
_hot = njit(inline="always", **_plainly)
_inner = njit(no_cpython_wrapper=True, no_cfunc_wrapper=True, **_plainly)


def _entry(signature):
    return njit([signature], cache=True, **_plainly)


def _late(signature):
    """An entry point of an aim that few trials have: compiled, or loaded, when it is called or warmed up."""

    def entry(function):
        compiled = cache(lambda: _entry(signature)(function))

        @wraps(function)
        def call(*arguments):
            return compiled()(*arguments)

        call.warm_up = compiled
        return call

    return entry


@_hot
def _named(board):
    """The parts of a board by name; entry points take plain tuples, which are handed over faster."""
    beds, admitted, planting, metrics = board
    return Beds(*beds), Admitted(*admitted), Planting(*planting), Metrics(*metrics)


@_hot
def _treatments(planting):
    """The number of treatments, told to the compiler as one that is never negative."""
    return np.int64(np.uint32(len(planting.plots)))


@_hot
def _span(beds, block):
    """First plot of a block, and the plot after its last."""
    first = np.int64(beds.blocks[block, FIRST])
    return first, first + np.int64(beds.blocks[block, PLOTS])


# --- random moves ---------------------------------------------------------------------------------


@_hot
def _next(random):
    """The next 64 bits of xoshiro256** (Blackman & Vigna 2021)."""
    s0, s1, s2, s3 = random[0], random[1], random[2], random[3]
    five = s1 * np.uint64(5)
    bits = ((five << np.uint64(7)) | (five >> np.uint64(57))) * np.uint64(9)
    s2 ^= s0
    s3 ^= s1
    random[0] = s0 ^ s3
    random[1] = s1 ^ s2
    random[2] = s2 ^ (s1 << np.uint64(17))
    random[3] = (s3 << np.uint64(45)) | (s3 >> np.uint64(19))
    return bits


@_hot
def _below(bits, bound):
    """A number from 0 to below the bound, out of the last 27 bits."""
    part = (bits & np.uint64(0x7FFFFFF)) * np.uint64(bound)
    return np.int64(part >> np.uint64(27))


@_hot
def _draw(beds, random):
    """A random move, legal or not, its place among the partners, and one in `DRAWS`: one random number."""
    bits = _next(random)
    plot = _below(bits >> np.uint64(37), len(beds.home))
    a = np.int64(beds.home[plot])
    pool = np.int64(beds.blocks[a, POOL_PLOTS])
    choice = _below(bits >> np.uint64(10), beds.blocks[a, REACH])
    if choice < pool:
        partner = np.int64(beds.blocks[a, POOL_FIRST]) + choice
    else:
        partner = len(beds.home) + np.int64(beds.loose[choice - pool])
    return plot, partner, choice, np.int64(bits & np.uint64(1023))


@_hot
def _read(beds, planted, plot, partner):
    """A move as (u, v, a, c): the partner is a plot, or `n + v` to replace; then c is −1."""
    plots = len(planted)
    u, a = np.int64(planted[plot]), np.int64(beds.home[plot])
    if partner < plots:
        return u, np.int64(planted[partner]), a, np.int64(beds.home[partner])
    return u, np.int64(partner - plots), a, np.int64(-1)


# --- rules ----------------------------------------------------------------------------------------


@_hot
def _may(admitted, planting, u, v, a, c):
    """Whether a move obeys all rules but limits on meetings.

    Without short cuts: half of the answers are no, and a branch guessed wrongly costs more than the rest.
    """
    bar, gate = admitted.apart[u, v], planting.gate
    may = (u != v) & (a != c) & (gate[a, v] & ~PINNED == bar) & (gate[a, u] < PINNED)
    if c >= 0:
        return may & (gate[c, u] & ~PINNED == bar) & (gate[c, v] < PINNED)
    plots = planting.plots
    return may & (plots[u] > admitted.plots[LEAST, u]) & (plots[v] < admitted.plots[MOST, v])


@_hot
def _meetings(copies, u, v, a, c, x):
    """How a move changes the blocks that a third treatment x shares with u and with v."""
    with_u, with_v = 0, 0
    if copies[a, x] > 0:
        with_u -= int(copies[a, u] == 1)
        with_v += int(copies[a, v] == 0)
    if c >= 0 and copies[c, x] > 0:
        with_u += int(copies[c, u] == 0)
        with_v -= int(copies[c, v] == 1)
    return with_u, with_v


@_hot
def _meeting(copies, u, v, a, c):
    """How a move changes the blocks that u and v share with each other."""
    change = int(copies[a, u] > 1) - int(copies[a, v] > 0)
    if c >= 0:
        change += int(copies[c, v] > 1) - int(copies[c, u] > 0)
    return change


@_inner
def _within(admitted, planting, i, j, change):
    """Whether a pair may share that many blocks more."""
    met = planting.meetings[i, j] + change
    return admitted.meetings[LEAST, i, j] <= met <= admitted.meetings[MOST, i, j]


@_inner
def _meets_in(beds, admitted, planting, u, v, a, c, block):
    """Whether a move keeps the limits on meetings with the treatments of one block."""
    begin, end = _span(beds, block)
    for plot in range(begin, end):
        x = np.int64(planting.planted[plot])
        if x != u and x != v:
            with_u, with_v = _meetings(planting.copies, u, v, a, c, x)
            if not _within(admitted, planting, u, x, with_u):
                return False
            if not _within(admitted, planting, v, x, with_v):
                return False
    return True


@_inner
def _is_last(beds, admitted, planting, u, block):
    """Whether all that a block holds besides one plot of u is filler: O(k)."""
    begin, end = _span(beds, block)
    for plot in range(begin, end):
        i = np.int64(planting.planted[plot])
        if i != u and i < admitted.real:
            return False
    return planting.copies[block, u] == 1


@_hot
def _leaves_some(beds, admitted, planting, u, v, a, c):
    """Whether a move leaves a treatment that is no filler in every block."""
    if (u < admitted.real) == (v < admitted.real):
        return True
    if u < admitted.real:
        return not _is_last(beds, admitted, planting, u, a)
    return c < 0 or not _is_last(beds, admitted, planting, v, c)


@_hot
def _meets(beds, admitted, planting, u, v, a, c):
    """Whether a move keeps all limits on meetings, and leaves no block to filler alone: O(k)."""
    if not _leaves_some(beds, admitted, planting, u, v, a, c):
        return False
    if not admitted.any_meetings:
        return True
    if not _within(admitted, planting, u, v, _meeting(planting.copies, u, v, a, c)):
        return False
    if not _meets_in(beds, admitted, planting, u, v, a, c, a):
        return False
    return c < 0 or _meets_in(beds, admitted, planting, u, v, a, c, c)


# --- planting -------------------------------------------------------------------------------------


@_hot
def _count(admitted, planting, block, treatment, by):
    """Enter one plot more or less of a treatment in a block."""
    planting.copies[block, treatment] += by
    planting.plots[treatment] += by
    copies, gate = planting.copies[block, treatment], planting.gate
    full = FULL if copies >= admitted.copies[MOST, block, treatment] else 0
    pinned = PINNED if copies <= admitted.copies[LEAST, block, treatment] else 0
    gate[block, treatment] = gate[block, treatment] & (FULL - 1) | full | pinned
    if admitted.any_apart:
        for i in range(len(planting.plots)):
            gate[block, i] += by * admitted.apart[treatment, i]


@_inner
def _record_meetings(planting, u, v, a, c):
    """Bring the shared blocks up to date with a move that is about to be made."""
    copies, meetings = planting.copies, planting.meetings
    change = _meeting(copies, u, v, a, c)
    meetings[u, v] += change
    meetings[v, u] += change
    for x in range(len(planting.plots)):
        if x != u and x != v:
            with_u, with_v = _meetings(copies, u, v, a, c, x)
            meetings[u, x] += with_u
            meetings[x, u] += with_u
            meetings[v, x] += with_v
            meetings[x, v] += with_v


@_hot
def _plant(admitted, planting, plot, partner, u, v, a, c):
    """Make a move in the contents; the tables are not touched."""
    if admitted.any_meetings:
        _record_meetings(planting, u, v, a, c)
    _count(admitted, planting, a, u, -1)
    _count(admitted, planting, a, v, 1)
    planting.planted[plot] = v
    if c >= 0:
        _count(admitted, planting, c, v, -1)
        _count(admitted, planting, c, u, 1)
        planting.planted[partner] = u


# --- scoring --------------------------------------------------------------------------------------


@_inner
def _sum_over(planted, begin, end, vector):
    """The sum of a vector over the treatments of some plots."""
    total = 0.0
    for plot in range(begin, end):
        total += vector[np.int64(planted[plot])]
    return total


@_hot
def _mean_of(beds, planted, vector, t, block):
    """The mean of a vector of so many treatments over what a block holds."""
    begin, end = _span(beds, block)
    total = _sum_over(planted, begin, end, vector)
    if beds.mean > 0.0:
        total += beds.mean * vector[t - 1]
    return beds.share[block] * total


@_inner
def _take_means(planted, begin, end, share, mean, table, means):
    """The mean row of the plots of a block, four rows at a time; returns its mean over the plots."""
    for first in range(begin, end, 4):
        i = np.int64(planted[first])
        j, k, m = i, i, i
        at_j, at_k, at_m = 0.0, 0.0, 0.0
        if first + 1 < end:
            j, at_j = np.int64(planted[first + 1]), share
        if first + 2 < end:
            k, at_k = np.int64(planted[first + 2]), share
        if first + 3 < end:
            m, at_m = np.int64(planted[first + 3]), share
        kept = 1.0 if first > begin else 0.0
        for x in range(len(means)):
            four = share * table[i, x] + at_j * table[j, x] + at_k * table[k, x] + at_m * table[m, x]
            means[x] = kept * means[x] + four
    total = 0.0
    if mean > 0.0:
        last = len(table) - 1
        for x in range(len(means)):
            means[x] += share * mean * table[last, x]
        total = mean * means[last]
    return share * (total + _sum_over(planted, begin, end, means))


@_hot
def _renew(beds, planted, metrics, block):
    """See to it that the means of a block are up to date."""
    stamps, means, inner, share = metrics.stamps, metrics.means, metrics.inner, beds.share[block]
    now = stamps[len(stamps) - 1]
    if stamps[block] != now:
        stamps[block] = now
        begin, end = _span(beds, block)
        table = metrics.inverse
        inner[0, block] = _take_means(planted, begin, end, share, beds.mean, table, means[0, block])
        if not metrics.overall:
            table = metrics.worth
            inner[1, block] = _take_means(planted, begin, end, share, beds.mean, table, means[1, block])


@_hot
def _columns(beds, admitted, planting, metrics, a, first, many):
    """List plots that plots of block a may exchange with, and what such moves owe to them; returns how many.

    Of so many plots, from `first` on and round within the pool of the block. Where treatments are kept
    apart, some are listed though no move with them is legal.
    """
    planted, gate, strip, listed = planting.planted, planting.gate, metrics.strip, metrics.listed
    begin = np.int64(beds.blocks[a, POOL_FIRST])
    end = begin + np.int64(beds.blocks[a, POOL_PLOTS])
    most = 1 if admitted.any_apart else 0
    _renew(beds, planted, metrics, a)
    last, gamma, c_, plot = np.int64(-1), 0.0, 0.0, first
    t = _treatments(planting)
    j = 0
    for i in range(many):
        v, c = np.int64(planted[plot]), np.int64(beds.home[plot])
        if c != last:
            last = c
            _renew(beds, planted, metrics, c)
            gamma = metrics.inner[0, a] + metrics.inner[0, c] + beds.share[a] + beds.share[c]
            gamma -= 2.0 * _mean_of(beds, planted, metrics.means[0, a], t, c)
            if not metrics.overall:
                c_ = metrics.inner[1, a] + metrics.inner[1, c]
                c_ -= 2.0 * _mean_of(beds, planted, metrics.means[1, a], t, c)
        listed[PARTNER * STRIP + j], listed[POINT * STRIP + j], listed[BLOCK * STRIP + j] = plot, v, c
        listed[ORDER * STRIP + j] = i
        may = (a != c) & (gate[a, v] & ~PINNED <= most) & (gate[c, v] < PINNED)
        strip[GAMMA * STRIP + j] = gamma
        strip[PULL_G * STRIP + j] = metrics.means[0, a, v] - metrics.means[0, c, v]
        strip[OWN_G * STRIP + j] = metrics.inverse[v, v]
        if not metrics.overall:
            strip[C_ * STRIP + j] = c_
            strip[PULL_H * STRIP + j] = metrics.means[1, a, v] - metrics.means[1, c, v]
            strip[OWN_H * STRIP + j] = metrics.worth[v, v]
        j += int(may)
        plot += 1
        if plot == end:
            plot = begin
    return j


@_hot
def _loose_columns(beds, admitted, planting, metrics, a, first, many):
    """The same for the loose treatments that may be planted in block a, from number `first` on and round."""
    planted, gate, strip, listed = planting.planted, planting.gate, metrics.strip, metrics.listed
    most = 1 if admitted.any_apart else 0
    _renew(beds, planted, metrics, a)
    number = first
    j = 0
    for i in range(many):
        v = np.int64(beds.loose[number])
        listed[PARTNER * STRIP + j], listed[POINT * STRIP + j], listed[ORDER * STRIP + j] = (
            len(planted) + v,
            v,
            i,
        )
        may = (gate[a, v] & ~PINNED <= most) & (planting.plots[v] < admitted.plots[MOST, v])
        strip[GAMMA * STRIP + j] = metrics.inner[0, a] + beds.share[a]
        strip[OWN_G * STRIP + j] = metrics.inverse[v, v]
        strip[PULL_G * STRIP + j] = metrics.means[0, a, v] - 0.5 * metrics.inverse[v, v]
        if not metrics.overall:
            strip[C_ * STRIP + j] = metrics.inner[1, a]
            strip[OWN_H * STRIP + j] = metrics.worth[v, v]
            strip[PULL_H * STRIP + j] = metrics.means[1, a, v] - 0.5 * metrics.worth[v, v]
        j += int(may)
        number += 1
        if number == len(beds.loose):
            number = 0
    return j


@_hot
def _list(beds, admitted, planting, metrics, a, first, many, replacing):
    """List partners for block a: from plot `first` on, or from loose treatment `first` on to replace."""
    if replacing:
        return _loose_columns(beds, admitted, planting, metrics, a, first, many)
    return _columns(beds, admitted, planting, metrics, a, first, many)


@_hot
def _meet(admitted, planting, metrics, begin, many, u, a, replacing):
    """What the moves of treatment u in block a owe to the entries between it and the partners."""
    strip, listed, gate = metrics.strip, metrics.listed, planting.gate
    for j in range(many):
        v = np.int64(listed[POINT * STRIP + j])
        strip[X_G * STRIP + j] = metrics.inverse[u, v]
        if not metrics.overall:
            strip[X_H * STRIP + j] = metrics.worth[u, v]
        closed = (u == v) | (j < begin)
        if replacing:
            strip[OF_G * STRIP + j] = 0.5 * metrics.inverse[u, u]
            if not metrics.overall:
                strip[OF_H * STRIP + j] = 0.5 * metrics.worth[u, u]
        else:
            c = np.int64(listed[BLOCK * STRIP + j])
            strip[OF_G * STRIP + j] = metrics.means[0, c, u]
            if not metrics.overall:
                strip[OF_H * STRIP + j] = metrics.means[1, c, u]
            closed |= (gate[c, u] & ~PINNED) > int(admitted.any_apart)
        strip[CLOSED * STRIP + j] = np.inf if closed else 0.0
    if admitted.any_apart:
        for j in range(many):
            v = np.int64(listed[POINT * STRIP + j])
            c = np.int64(-1) if replacing else np.int64(listed[BLOCK * STRIP + j])
            if not _may(admitted, planting, u, v, a, c):
                strip[CLOSED * STRIP + j] = np.inf


@_hot
def _score(metrics, many, u, a, replacing):
    """Rises, times the ratio, and ratios of the moves of treatment u in block a; how many are legal.

    For the overall aim the rise is a lower bound, `−log x ≥ 1 − x`, that orders moves alike.
    """
    strip = metrics.strip
    pull_g, own_g = metrics.means[0, a, u], metrics.inverse[u, u]
    legal = 0
    if metrics.overall:
        scale = 1.0 / metrics.degrees
        for j in range(many):
            alpha = own_g + strip[OWN_G * STRIP + j] - 2.0 * strip[X_G * STRIP + j]
            pull = pull_g - strip[OF_G * STRIP + j]
            one = 1.0 + (pull - strip[PULL_G * STRIP + j])
            gamma = strip[GAMMA * STRIP + j]
            if replacing:
                gamma -= pull + strip[PULL_G * STRIP + j] + 0.25 * alpha
            ratio = one * one - alpha * gamma
            strip[RATIO * STRIP + j] = ratio
            strip[RISE * STRIP + j] = (1.0 - ratio) * ratio * scale + strip[CLOSED * STRIP + j]
            legal += int(strip[CLOSED * STRIP + j] == 0.0)
        return legal
    pull_h, own_h = metrics.means[1, a, u], metrics.worth[u, u]
    for j in range(many):
        alpha = own_g + strip[OWN_G * STRIP + j] - 2.0 * strip[X_G * STRIP + j]
        in_h = own_h + strip[OWN_H * STRIP + j] - 2.0 * strip[X_H * STRIP + j]
        pull, pull_in_h = pull_g - strip[OF_G * STRIP + j], pull_h - strip[OF_H * STRIP + j]
        one = 1.0 + (pull - strip[PULL_G * STRIP + j])
        gamma, c = strip[GAMMA * STRIP + j], strip[C_ * STRIP + j]
        if replacing:
            gamma -= pull + strip[PULL_G * STRIP + j] + 0.25 * alpha
            c -= pull_in_h + strip[PULL_H * STRIP + j] + 0.25 * in_h
        b = pull_in_h - strip[PULL_H * STRIP + j]
        strip[RATIO * STRIP + j] = one * one - alpha * gamma
        strip[RISE * STRIP + j] = gamma * in_h - 2.0 * one * b + alpha * c + strip[CLOSED * STRIP + j]
        legal += int(strip[CLOSED * STRIP + j] == 0.0)
    return legal


@_hot
def _score_strip(admitted, planting, metrics, begin, many, u, a, replacing):
    """Score all moves of treatment u in block a with partners listed; returns how many are legal."""
    _meet(admitted, planting, metrics, begin, many, u, a, replacing)
    if replacing:
        return _score(metrics, many, u, a, True)
    return _score(metrics, many, u, a, False)


@_hot
def _true_rise(metrics, rise, ratio):
    return -np.log(ratio) / metrics.degrees if metrics.overall else rise


@_hot
def _for_nothing(beds, metrics, j, u, a):
    """Whether an exchange only swaps the names of two blocks, alike but for u and v: then w = ½ s d."""
    strip = metrics.strip
    c = np.int64(metrics.listed[BLOCK * STRIP + j])
    step = beds.share[a] + beds.share[c]
    dd = metrics.inverse[u, u] + strip[OWN_G * STRIP + j] - 2.0 * strip[X_G * STRIP + j]
    dw = metrics.means[0, a, u] - strip[OF_G * STRIP + j] - strip[PULL_G * STRIP + j]
    return strip[GAMMA * STRIP + j] - step - step * dw + 0.25 * step * step * dd < NOTHING


# --- accepted moves -------------------------------------------------------------------------------


@_inner
def _image_of_d(table, u, v, image):
    for i in range(len(image)):
        image[i] = table[u, i] - table[v, i]


@_inner
def _image_exchanged(of_a, of_c, half_step, of_d, image):
    """The image of `w − ½ s d`, from those of the means of both blocks and of d."""
    for i in range(len(image)):
        image[i] = (of_a[i] - of_c[i]) - half_step * of_d[i]


@_inner
def _image_replaced(of_a, table, u, v, half_step, of_d, image):
    for i in range(len(image)):
        image[i] = of_a[i] - 0.5 * (table[u, i] + table[v, i]) - half_step * of_d[i]


@_hot
def _images(beds, table, means, u, v, a, c, of_d, of_w):
    """Fill in the images of d and of `w − ½ s d` in a table, whose means are up to date."""
    _image_of_d(table, u, v, of_d)
    if c >= 0:
        _image_exchanged(means[a], means[c], 0.5 * (beds.share[a] + beds.share[c]), of_d, of_w)
    else:
        _image_replaced(means[a], table, u, v, 0.5 * beds.share[a], of_d, of_w)


@_hot
def _product_with_w(beds, planted, vector, t, u, v, a, c):
    """`w − ½ s d` times a vector over the treatments."""
    d = vector[u] - vector[v]
    in_a = _mean_of(beds, planted, vector, t, a)
    if c >= 0:
        return in_a - _mean_of(beds, planted, vector, t, c) - 0.5 * (beds.share[a] + beds.share[c]) * d
    return in_a - 0.5 * (vector[u] + vector[v]) - 0.5 * beds.share[a] * d


@_inner
def _factors(g, h, alpha, one, gamma, ratio, x, y):
    for i in range(len(g)):
        x[i] = (gamma * g[i] - one * h[i]) / ratio
        y[i] = (alpha * h[i] - one * g[i]) / ratio


@_inner
def _halves(x, y, half_a, half_b, half_c, p, q):
    """Turn the images p and q into the factors s and z."""
    for i in range(len(x)):
        p[i] += half_a * x[i] + half_b * y[i]
        q[i] += half_c * y[i] + half_b * x[i]


@_inner
def _grow(inverse, t, g, h, x, y):
    for i in range(t):
        g_i, h_i = g[i], h[i]
        for j in range(inverse.shape[1]):
            inverse[i, j] += g_i * x[j] + h_i * y[j]


@_inner
def _grow_both(inverse, worth, t, g, h, x, y, s, z):
    """Both tables in one pass: each takes half of its time to get its entries."""
    for i in range(t):
        g_i, h_i, x_i, y_i, s_i, z_i = g[i], h[i], x[i], y[i], s[i], z[i]
        for j in range(inverse.shape[1]):
            inverse[i, j] += g_i * x[j] + h_i * y[j]
            worth[i, j] += (x_i * s[j] + s_i * x[j]) + (y_i * z[j] + z_i * y[j])


@_hot
def _move_points(beds, planted, metrics, t, u, v, a, c):
    """Bring the tables up to date with a move that is about to be made; returns its rise and ratio.

    The means of its blocks must be up to date; those of all blocks are not afterwards.
    """
    inverse, worth, work = metrics.inverse, metrics.worth, metrics.work
    g, h, x, y, p, q = work[0], work[1], work[2], work[3], work[4], work[5]
    metrics.stamps[len(metrics.stamps) - 1] += 1
    _images(beds, inverse, metrics.means[0], u, v, a, c, g, h)
    alpha, one = g[u] - g[v], 1.0 + h[u] - h[v]
    gamma = _product_with_w(beds, planted, h, t, u, v, a, c)
    ratio = one * one - alpha * gamma
    _factors(g, h, alpha, one, gamma, ratio, x, y)
    if metrics.overall:
        _grow(inverse, t, g, h, x, y)
        return 0.0, ratio
    _images(beds, worth, metrics.means[1], u, v, a, c, p, q)
    half_a, half_b = 0.5 * (p[u] - p[v]), 0.5 * (q[u] - q[v])
    half_c = 0.5 * _product_with_w(beds, planted, q, t, u, v, a, c)
    rise = 2.0 * (gamma * half_a - 2.0 * one * half_b + alpha * half_c) / ratio
    _halves(x, y, half_a, half_b, half_c, p, q)
    _grow_both(inverse, worth, t, g, h, x, y, p, q)
    return rise, ratio


# --- connecting -----------------------------------------------------------------------------------


@_inner
def _root(parent, point):
    while parent[point] != point:
        parent[point] = parent[np.int64(parent[point])]
        point = np.int64(parent[point])
    return point


@_inner
def _parts(beds, planting, t):
    """Connected parts of the plan, treatments without a plot included: O(n)."""
    parent, parts = planting.room, t + len(beds.blocks)
    for point in range(parts):
        parent[point] = point
    for plot in range(len(planting.planted)):
        i = _root(parent, np.int64(planting.planted[plot]))
        j = _root(parent, t + np.int64(beds.home[plot]))
        if i != j:
            parent[i] = j
            parts -= 1
    return parts


# --- trying and scanning --------------------------------------------------------------------------


@_hot
def _any_allowed(strip, many, temperature, chance):
    """Whether one of the moves scored may be made, as far as can be told at a glance."""
    found = 0
    for j in range(many):
        ratio = strip[RATIO * STRIP + j]
        allowed = temperature * DRAWS[chance + j] * ratio
        found |= int(strip[RISE * STRIP + j] <= allowed) & int(ratio >= LEAST_RATIO)
    return found > 0


@_hot
def _first_allowed(beds, admitted, planting, metrics, many, temperature, chance, u, a, replacing):
    """The first of the moves scored that may be made, −1 for none, its rise, and the legal ones up to it."""
    strip, listed, legal = metrics.strip, metrics.listed, 0
    for j in range(many):
        legal += int(strip[CLOSED * STRIP + j] == 0.0)
        ratio = strip[RATIO * STRIP + j]
        allowed = temperature * DRAWS[chance + j]
        if not (strip[RISE * STRIP + j] <= allowed * ratio and ratio >= LEAST_RATIO):
            continue
        rise = strip[RISE * STRIP + j] / ratio
        v = np.int64(listed[POINT * STRIP + j])
        c = np.int64(-1) if replacing else np.int64(listed[BLOCK * STRIP + j])
        if _true_rise(metrics, rise, ratio) > allowed:
            continue
        if not replacing and abs(rise) < NOTHING and _for_nothing(beds, metrics, j, u, a):
            continue
        if _meets(beds, admitted, planting, u, v, a, c):
            return j, rise, legal
    return -1, 0.0, legal


@_hot
def _any_below(strip, many, below):
    found = 0
    for j in range(many):
        ratio = strip[RATIO * STRIP + j]
        found |= int(strip[RISE * STRIP + j] < below * ratio) & int(ratio >= LEAST_RATIO)
    return found > 0


@_inner
def _least_below(beds, admitted, planting, metrics, many, below, u, a, replacing):
    """The one of the moves scored that rises least and less than `below`, −1 for none, and its rise."""
    strip, listed, best = metrics.strip, metrics.listed, -1
    for j in range(many):
        ratio = strip[RATIO * STRIP + j]
        if strip[RISE * STRIP + j] < below * ratio and ratio >= LEAST_RATIO:
            v = np.int64(listed[POINT * STRIP + j])
            c = np.int64(-1) if replacing else np.int64(listed[BLOCK * STRIP + j])
            if _meets(beds, admitted, planting, u, v, a, c):
                best, below = j, strip[RISE * STRIP + j] / ratio
    return best, below


@_inner
def _tell_rises(strip, many, rises, told):
    for j in range(many):
        if told < len(rises) and strip[CLOSED * STRIP + j] == 0.0:
            rises[told] = strip[RISE * STRIP + j] / strip[RATIO * STRIP + j]
            told += 1
    return told


# --- through broken rules --------------------------------------------------------------------------


@_hot
def _keeps_counts(admitted, u, v, a, c):
    """Whether a move is one at all, and replaces only treatments whose replication may change."""
    plots = admitted.plots
    return (u != v) & (a != c) & ((c >= 0) | (plots[LEAST, u] < plots[MOST, u]))


@_hot
def _off(least, most, count, by):
    """How much further outside its range a count gets when it changes by one, up or down."""
    if by > 0:
        return int(count >= most) - int(count < least)
    return int(count <= least) - int(count > most)


@_inner
def _off_by(least, most, count, by):
    """The same for any change."""
    before = max(0, count - most) + max(0, least - count)
    return max(0, count + by - most) + max(0, least - count - by) - before


@_inner
def _breaks(admitted, planting, u, v, a, c):
    """By how many breaches of rules a move makes a plan worse, limits on meetings aside: O(1).

    A breach is a plot too many or too few in a range, or two plots of a block whose treatments never meet.
    """
    copies, gate, bar = planting.copies, planting.gate, admitted.apart[u, v]
    low, high = admitted.copies[LEAST], admitted.copies[MOST]
    change = _off(low[a, u], high[a, u], copies[a, u], -1) + _off(low[a, v], high[a, v], copies[a, v], 1)
    change += (gate[a, v] & (FULL - 1)) - (gate[a, u] & (FULL - 1)) - bar
    if c >= 0:
        change += _off(low[c, v], high[c, v], copies[c, v], -1) + _off(low[c, u], high[c, u], copies[c, u], 1)
        return change + (gate[c, u] & (FULL - 1)) - (gate[c, v] & (FULL - 1)) - bar
    least, most, plots = admitted.plots[LEAST], admitted.plots[MOST], planting.plots
    return change + _off(least[u], most[u], plots[u], -1) + _off(least[v], most[v], plots[v], 1)


@_inner
def _breaks_meetings(admitted, planting, u, v, a, c):
    """The same for limits on meetings: O(t)."""
    if not admitted.any_meetings:
        return 0
    copies, met = planting.copies, planting.meetings
    least, most = admitted.meetings[LEAST], admitted.meetings[MOST]
    change = _off_by(least[u, v], most[u, v], met[u, v], _meeting(copies, u, v, a, c))
    for x in range(len(planting.plots)):
        if x != u and x != v and (copies[a, x] > 0 or (c >= 0 and copies[c, x] > 0)):
            with_u, with_v = _meetings(copies, u, v, a, c, x)
            change += _off_by(least[u, x], most[u, x], met[u, x], with_u)
            change += _off_by(least[v, x], most[v, x], met[v, x], with_v)
    return change


# --- entry points: each call ends after a bounded number of steps ---------------------------------


@_entry(types.UniTuple(_INT, 2)(_BOARD, _RANDOM, _INT, _YES))
def wander(board, random, tries, join):
    """Draw random moves and make those that are legal, whatever they are worth.

    With `join`, only moves that do not add a connected part, and only until one part is left.
    Exchanging plots of two parts joins them unless both plots are bridges, and never adds a part;
    with n ≥ t + b − 1 every disconnected plan has a plot that is no bridge. Moves within a part change
    which plots those are. The tables are left behind. Returns the moves made and the parts left.
    """
    beds, admitted, planting, _ = _named(board)
    planted, t, made = planting.planted, _treatments(planting), 0
    parts = _parts(beds, planting, t)
    for _ in range(tries):
        if join and parts == 1:
            break
        plot, partner, _, _ = _draw(beds, random)
        u, v, a, c = _read(beds, planted, plot, partner)
        if not (_may(admitted, planting, u, v, a, c) and _meets(beds, admitted, planting, u, v, a, c)):
            continue
        _plant(admitted, planting, plot, partner, u, v, a, c)
        made += 1
        if join:
            now = _parts(beds, planting, t)
            if now <= parts:
                parts = now
            else:  # taken back: an exchange by itself, a replacement by planting u again
                _plant(admitted, planting, plot, partner, v, u, a, c)
    return made, _parts(beds, planting, t)


@_entry(_FLOAT(_BOARD, _INT, _INT))
def make_move(board, plot, partner):
    """Make a legal move of a connected plan; returns how much the objective rises."""
    beds, admitted, planting, metrics = _named(board)
    t = _treatments(planting)
    u, v, a, c = _read(beds, planting.planted, plot, partner)
    _renew(beds, planting.planted, metrics, a)
    if c >= 0:
        _renew(beds, planting.planted, metrics, c)
    rise, ratio = _move_points(beds, planting.planted, metrics, t, u, v, a, c)
    _plant(admitted, planting, plot, partner, u, v, a, c)
    return _true_rise(metrics, rise, ratio)


@_entry(types.UniTuple(_INT, 4)(_BOARD, _RANDOM, _FLOAT, _FLOAT, _INT, _INT, _INT, _F1))
def anneal(board, random, temperature, cooling, moves, tries, most_accepted, rises):
    """Simulated annealing (Metropolis et al. 1953; Kirkpatrick, Gelatt & Vecchi 1983).

    Moves are tried in an order that does not depend on which are accepted: the plots of a random block in
    turn, each with the same partners. To begin anew after an accepted move instead would favour moves of
    blocks where few are accepted, as if it were hotter. Ends after `moves` scored moves, about `tries`
    looked at, legal or not, or `most_accepted` accepted ones, whichever comes first; but the moves of a
    strip are all scored. The temperature is multiplied by `cooling` for each scored move. The first rises
    are written to `rises`, as many as it has room for. Returns the moves scored, looked at, accepted, and
    accepted though they raise the objective.
    """
    beds, admitted, planting, metrics = _named(board)
    planted, t, strip = planting.planted, _treatments(planting), metrics.strip
    scored, drawn, accepted, climbed, told, tried = 0, 0, 0, 0, 0, FEWEST
    strip[POWERS * STRIP] = 1.0
    for j in range(MOST_LISTED):
        strip[POWERS * STRIP + j + 1] = cooling * strip[POWERS * STRIP + j]
    while scored < moves and drawn < tries and accepted < most_accepted:
        plot, partner, choice, chance = _draw(beds, random)
        a, pool = np.int64(beds.home[plot]), np.int64(beds.blocks[np.int64(beds.home[plot]), POOL_PLOTS])
        replacing = choice >= pool
        first = choice - pool if replacing else partner
        tried = min(tried, len(beds.loose) if replacing else pool)
        begin, end = _span(beds, a)
        before, listed, order, stale = accepted, np.int64(0), np.int64(-1), True
        for _ in range(begin, end):
            drawn += tried
            while accepted < most_accepted:
                if stale:
                    listed, stale = (
                        _list(beds, admitted, planting, metrics, a, first, tried, replacing),
                        False,
                    )
                done = np.int64(0)
                while done < listed and metrics.listed[ORDER * STRIP + done] <= order:
                    done += 1  # tried already, before the last accepted move
                u = np.int64(planted[plot])
                if planting.gate[a, u] >= PINNED or (
                    replacing and planting.plots[u] <= admitted.plots[LEAST, u]
                ):
                    break
                legal = _score_strip(admitted, planting, metrics, done, listed, u, a, replacing)
                if told < len(rises):
                    told = _tell_rises(strip, listed, rises, told)
                j, rise = -1, 0.0
                if _any_allowed(strip, listed, temperature, chance):
                    j, rise, legal = _first_allowed(
                        beds, admitted, planting, metrics, listed, temperature, chance, u, a, replacing
                    )
                scored += legal
                temperature *= strip[POWERS * STRIP + legal]
                chance = (chance + listed) & 1023
                if j < 0:
                    break
                partner = np.int64(metrics.listed[PARTNER * STRIP + j])
                order, stale = np.int64(metrics.listed[ORDER * STRIP + j]), True
                u, v, a, c = _read(beds, planted, plot, partner)
                _move_points(beds, planted, metrics, t, u, v, a, c)
                _plant(admitted, planting, plot, partner, u, v, a, c)
                accepted += 1
                climbed += int(rise > NOTHING)
            if scored >= moves or accepted >= most_accepted:
                break
            order = np.int64(-1)
            plot += 1
            if plot == end:
                plot = begin
        tried = max(FEWEST, tried // 2) if accepted > before else min(2 * tried, MOST_LISTED)
    return scored, drawn, accepted, climbed


@_entry(types.Tuple((_INT, _INT, _INT, _FLOAT))(_BOARD, _INT, _INT, _FLOAT))
def best_move(board, begin, end, below):
    """The legal move of the blocks from begin to before end that rises least and less than `below`.

    Exchanges are looked at from the block that comes first, and limits on meetings asked of better
    moves alone. Returns the moves scored, the move (plot −1 for none) and its rise, for the overall
    aim the lower bound by which moves are ordered.
    """
    beds, admitted, planting, metrics = _named(board)
    scored, best_plot, best_partner = 0, -1, -1
    for a in range(begin, end):
        first, next_ = _span(beds, a)
        pool = np.int64(beds.blocks[a, POOL_PLOTS])
        last, loose = np.int64(beds.blocks[a, POOL_FIRST]) + pool, np.int64(beds.blocks[a, REACH]) - pool
        while next_ < last + loose:
            replacing = next_ >= last
            many = min(STRIP, last + loose - next_ if replacing else last - next_)
            begin_at = next_ - last if replacing else next_
            listed = _list(beds, admitted, planting, metrics, a, begin_at, many, replacing)
            next_ += many
            for plot in range(first, first + np.int64(beds.blocks[a, PLOTS])):
                u = np.int64(planting.planted[plot])
                if planting.gate[a, u] >= PINNED:
                    continue
                if replacing and planting.plots[u] <= admitted.plots[LEAST, u]:
                    continue
                scored += _score_strip(admitted, planting, metrics, 0, listed, u, a, replacing)
                if _any_below(metrics.strip, listed, below):
                    j, below = _least_below(beds, admitted, planting, metrics, listed, below, u, a, replacing)
                    if j >= 0:
                        best_plot, best_partner = plot, np.int64(metrics.listed[PARTNER * STRIP + j])
    return scored, best_plot, best_partner, below


# --- single moves, for goals that look at more than the objective ----------------------------------


@_hot
def _real(metrics):
    """The number of treatments that count: filler and the general mean come after them."""
    return np.int64(metrics.degrees) + 1


@_inner
def _of_move(beds, planted, metrics, t, layer, u, v, a, c):
    """`d'd`, `d'w`, `w'w` of a move in G (layer 0) or H (1); the means of its blocks must be up to date."""
    table, means = metrics.inverse if layer == 0 else metrics.worth, metrics.means[layer]
    dd = table[u, u] + table[v, v] - 2.0 * table[u, v]
    if c >= 0:
        dw = (means[a, u] - means[c, u]) - (means[a, v] - means[c, v])
        ww = metrics.inner[layer, a] + metrics.inner[layer, c] - 2.0 * _mean_of(beds, planted, means[a], t, c)
        return dd, dw, ww
    dw = means[a, u] - means[a, v] - 0.5 * (table[u, u] - table[v, v])
    ww = metrics.inner[layer, a] - means[a, u] - means[a, v]
    return dd, dw, ww + 0.25 * (table[u, u] + table[v, v]) + 0.5 * table[u, v]


@_hot
def _step(beds, a, c):
    """s of a move: one over the weight of its block, or of both."""
    return beds.share[a] + beds.share[c] if c >= 0 else beds.share[a]


@_inner
def _single(beds, planted, metrics, t, u, v, a, c):
    """How much a move raises the objective, the ratio, and whether it only swaps the names of two blocks."""
    _renew(beds, planted, metrics, a)
    if c >= 0:
        _renew(beds, planted, metrics, c)
    step = _step(beds, a, c)
    alpha, beta, ww = _of_move(beds, planted, metrics, t, 0, u, v, a, c)
    one, gamma = 1.0 + beta, ww + step
    ratio = one * one - alpha * gamma
    if metrics.overall:
        rise = (1.0 - ratio) / metrics.degrees  # a lower bound, see `_score`
    else:
        a2, b2, c2 = _of_move(beds, planted, metrics, t, 1, u, v, a, c)
        rise = (gamma * a2 - 2.0 * one * b2 + alpha * c2) / ratio
    apart = ww - step * beta + 0.25 * step * step * alpha
    return rise, ratio, c >= 0 and abs(rise) < NOTHING and apart < NOTHING


@_entry(types.UniTuple(_INT, 5)(_BOARD, _RANDOM, _FLOAT, _FLOAT, _FLOAT, _INT, _INT, _INT, _INT))
def cross(board, random, temperature, cooling, price, breaches, moves, tries, most_accepted):
    """Simulated annealing that may break rules, at a price for each breach.

    Moves are drawn one by one, and may break rules other than block sizes and replicates. `breaches` is how
    many there are to begin with. Returns the moves scored, drawn, accepted, accepted though they raise the
    objective, and the breaches left.
    """
    beds, admitted, planting, metrics = _named(board)
    planted, t = planting.planted, _treatments(planting)
    scored, drawn, accepted, climbed = 0, 0, 0, 0
    while scored < moves and drawn < tries and accepted < most_accepted:
        drawn += 1
        plot, partner, _, place = _draw(beds, random)
        u, v, a, c = _read(beds, planted, plot, partner)
        if not _keeps_counts(admitted, u, v, a, c):
            continue
        if not _leaves_some(beds, admitted, planting, u, v, a, c):
            continue
        scored += 1
        allowed = temperature * DRAWS[place]
        temperature *= cooling
        change = _breaks(admitted, planting, u, v, a, c)
        hope = breaches if admitted.any_meetings else 0
        rise, ratio, same = _single(beds, planted, metrics, t, u, v, a, c)
        if not (rise + price * (change - hope) <= allowed and ratio >= LEAST_RATIO):
            continue
        change += _breaks_meetings(admitted, planting, u, v, a, c)
        if _true_rise(metrics, rise, ratio) + price * change > allowed:
            continue
        if change == 0 and same:
            continue  # two blocks would only swap their names
        _move_points(beds, planted, metrics, t, u, v, a, c)
        _plant(admitted, planting, plot, partner, u, v, a, c)
        breaches += change
        accepted += 1
        climbed += int(rise > NOTHING)
    return scored, drawn, accepted, climbed, breaches


@_entry(types.UniTuple(_INT, 2)(_BOARD, _RANDOM, _FLOAT, _INT, _INT))
def mend(board, random, temperature, breaches, tries):
    """Draw random moves until no rule is broken, whatever they are worth; the tables are left behind.

    A move that adds so many breaches is made with the odds that annealing gives it. Returns the breaches
    left and the moves drawn.
    """
    beds, admitted, planting, _ = _named(board)
    drawn = 0
    while breaches > 0 and drawn < tries:
        drawn += 1
        plot, partner, _, place = _draw(beds, random)
        u, v, a, c = _read(beds, planting.planted, plot, partner)
        if not _keeps_counts(admitted, u, v, a, c):
            continue
        if not _leaves_some(beds, admitted, planting, u, v, a, c):
            continue
        allowed = temperature * DRAWS[place]
        change = _breaks(admitted, planting, u, v, a, c)
        if change - (breaches if admitted.any_meetings else 0) > allowed:
            continue
        change += _breaks_meetings(admitted, planting, u, v, a, c)
        if change <= allowed:
            _plant(admitted, planting, plot, partner, u, v, a, c)
            breaches += change
    return breaches, drawn


# --- even meetings --------------------------------------------------------------------------------
#
# With the concurrences M = NN', T = N'M and X = N'N every move changes N by d f', d = e_u − e_v and
# f = e_c − e_a (f = −e_a to replace). With q = Nf, s = f'f and n = d'd, M grows by d w' + w d',
# w = q + ½ s d, so
#
#     the sum of all M² grows by  4 d'Mq + 2s d'Md + 2n q'q + 4ns d'q + 2(d'q)² + s²n²
#
# of which d'Mq is four entries of T and q'q three of X. Off the diagonal, and each pair once, it is half
# of that less what the two entries M_uu and M_vv that change bring. An accepted move costs O(t + b + rk).
# Filler meets nobody: it has no row in N, and a move of it has d = e_u or −e_v, n = 1.


class Concurrences(NamedTuple):
    """How often treatments meet, in whole numbers."""

    pairs: Any
    """(t, t) M = NN'"""
    sums: Any
    """(b, t) T = N'M: the meetings of a treatment with all that stands in a block"""
    common: Any
    """(b, b) X = N'N"""


_MEETINGS = types.Tuple((_I2, _I2, _I2))


@_hot
def _more_squares(copies, table, real, u, v, a, c):
    """How much a move raises the sum of squared concurrences over pairs of treatments."""
    pairs, sums, common = table.pairs, table.sums, table.common
    of_u, of_v = np.int64(u < real), np.int64(v < real)
    q_u, q_v = -np.int64(copies[a, u]), -np.int64(copies[a, v])
    in_m, qq, s = np.int64(sums[a, v]) - np.int64(sums[a, u]), np.int64(common[a, a]), np.int64(1)
    if c >= 0:
        q_u += np.int64(copies[c, u])
        q_v += np.int64(copies[c, v])
        in_m += np.int64(sums[c, u]) - np.int64(sums[c, v])
        qq += np.int64(common[c, c]) - 2 * np.int64(common[a, c])
        s = np.int64(2)
    q_u, q_v, n = of_u * q_u, of_v * q_v, of_u + of_v
    m_u, m_v, dq = np.int64(pairs[u, u]), np.int64(pairs[v, v]), q_u - q_v
    dmd = m_u + m_v - 2 * np.int64(pairs[u, v])
    whole = 4 * in_m + 2 * s * dmd + 2 * n * qq + 4 * n * s * dq + 2 * dq * dq + s * s * n * n
    more_u, more_v = of_u * (2 * q_u + s), of_v * (s - 2 * q_v)
    own = more_u * (2 * m_u + more_u) + more_v * (2 * m_v + more_v)
    return (whole - own) // 2


@_inner
def _meet_in(beds, planted, pairs, u, v, block, by):
    """Enter that u shares a block with its plots so much more often, and v less."""
    begin, end = _span(beds, block)
    for plot in range(begin, end):
        i = np.int64(planted[plot])
        if i != u and i != v:
            pairs[u, i] += by
            pairs[i, u] += by
            pairs[v, i] -= by
            pairs[i, v] -= by


@_inner
def _spread_in(beds, planted, sums, row, u, v, block, by):
    """Add to the sums of one block a number for each plot of another, u and v left out."""
    begin, end = _span(beds, block)
    for plot in range(begin, end):
        i = np.int64(planted[plot])
        if i != u and i != v:
            sums[row, i] += by


@_inner
def _recount(beds, planted, copies, table, real):
    """Count all concurrences afresh: O(tb + b² + the meetings of all blocks)."""
    pairs, sums, common = table.pairs, table.sums, table.common
    pairs[:, :] = 0
    sums[:, :] = 0
    common[:, :] = 0
    blocks = len(beds.blocks)
    for block in range(blocks):
        begin, end = _span(beds, block)
        for plot in range(begin, end):
            i = np.int64(planted[plot])
            if i < real:
                for other in range(begin, end):
                    if np.int64(planted[other]) < real:
                        pairs[i, np.int64(planted[other])] += 1
                for other in range(blocks):
                    common[block, other] += copies[other, i]
    for block in range(blocks):
        begin, end = _span(beds, block)
        for plot in range(begin, end):
            i = np.int64(planted[plot])
            if i < real:
                for x in range(real):
                    sums[block, x] += pairs[i, x]


@_inner
def _make_even(beds, admitted, planting, table, real, plot, partner, u, v, a, c):
    """Make a move in the contents and in the concurrences."""
    if u < real and v < real:
        _record_concurrences(beds, planting, table, u, v, a, c)
        _plant(admitted, planting, plot, partner, u, v, a, c)
    else:  # filler moves seldom
        _plant(admitted, planting, plot, partner, u, v, a, c)
        _recount(beds, planting.planted, planting.copies, table, real)


@_inner
def _record_concurrences(beds, planting, table, u, v, a, c):
    """Bring the concurrences up to date with a move that is about to be made."""
    planted, copies = planting.planted, planting.copies
    pairs, sums, common = table.pairs, table.sums, table.common
    t, b = len(planting.plots), len(beds.blocks)
    q_u, q_v, s = -int(copies[a, u]), -int(copies[a, v]), 1
    if c >= 0:
        q_u, q_v, s = q_u + int(copies[c, u]), q_v + int(copies[c, v]), 2
    for i in range(t):  # the blocks that change hold other treatments now, which meet as before
        d = pairs[u, i] - pairs[v, i]
        sums[a, i] -= d
        if c >= 0:
            sums[c, i] += d
    more_uu, more_vv, more_uv = 2 * q_u + s, s - 2 * q_v, q_v - q_u - s
    for block in range(b):  # and in all blocks meet otherwise than before
        n_u, n_v = int(copies[block, u]), int(copies[block, v])
        others = -int(common[block, a]) - n_u * q_u - n_v * q_v
        if c >= 0:
            others += int(common[block, c])
        if block == a:
            n_u, n_v = n_u - 1, n_v + 1
        elif block == c:
            n_u, n_v = n_u + 1, n_v - 1
        sums[block, u] += n_u * more_uu + n_v * more_uv + others
        sums[block, v] += n_v * more_vv + n_u * more_uv - others
        if n_u != n_v:
            _spread_in(beds, planted, sums, block, u, v, a, n_v - n_u)
            if c >= 0:
                _spread_in(beds, planted, sums, block, u, v, c, n_u - n_v)
    _meet_in(beds, planted, pairs, u, v, a, -1)
    if c >= 0:
        _meet_in(beds, planted, pairs, u, v, c, 1)
    pairs[u, u] += more_uu
    pairs[v, v] += more_vv
    pairs[u, v] += more_uv
    pairs[v, u] += more_uv
    _record_common(planting.copies, common, u, v, a, c)


@_inner
def _record_common(copies, common, u, v, a, c):
    """Bring the products of blocks up to date: X grows by f y' + y f' + 2 f f' with y = N'd."""
    for block in range(len(common)):
        y = int(copies[block, u]) - int(copies[block, v])
        common[a, block] -= y
        common[block, a] -= y
        if c >= 0:
            common[c, block] += y
            common[block, c] += y
    common[a, a] += 2
    if c >= 0:
        common[c, c] += 2
        common[a, c] -= 2
        common[c, a] -= 2


@_hot
def _stays_near(copies, table, i, block):
    """Whether i shares another block with somebody of this one, so that leaving it parts nothing."""
    mine, own = np.int64(copies[block, i]), np.int64(table.pairs[i, i])
    here = mine * np.int64(table.common[block, block]) + mine * (own - mine * mine)
    return np.int64(table.sums[block, i]) > here


@_inner
def _stays_connected(beds, admitted, planting, table, plot, partner, u, v, a, c):
    """Whether a legal move of a connected plan leaves it connected: O(1), where that is not plain O(n)."""
    copies = planting.copies
    if beds.mean > 0.0:
        return True  # block totals join what no chain of blocks does
    near = _stays_near(copies, table, u, a) and copies[a, v] == 0
    if near and (c < 0 or (copies[c, u] == 0 and _stays_near(copies, table, v, c))):
        return True
    _plant(admitted, planting, plot, partner, u, v, a, c)
    parts = _parts(beds, planting, len(planting.plots))
    _plant(admitted, planting, plot, partner, v, u, a, c)
    return parts == 1


@_late(types.UniTuple(_INT, 5)(_BOARD, _MEETINGS, _RANDOM, _FLOAT, _FLOAT, _INT, _INT, _INT, _F1))
def anneal_meetings(board, table, random, temperature, cooling, moves, tries, most_accepted, rises):
    """The same as `anneal` for the sum of squared concurrences; the tables are left behind.

    Returns the moves scored, drawn, accepted, and accepted though they raise the sum, and its change.
    """
    beds, admitted, planting, metrics = _named(board)
    table, real = Concurrences(*table), _real(metrics)
    scored, drawn, accepted, climbed, change = 0, 0, 0, 0, 0
    while scored < moves and drawn < tries and accepted < most_accepted:
        drawn += 1
        plot, partner, _, place = _draw(beds, random)
        u, v, a, c = _read(beds, planting.planted, plot, partner)
        if not _may(admitted, planting, u, v, a, c):
            continue
        rise = _more_squares(planting.copies, table, real, u, v, a, c)
        if scored < len(rises):
            rises[scored] = rise
        scored += 1
        allowed = temperature * DRAWS[place]
        temperature *= cooling
        if not rise <= allowed or not _meets(beds, admitted, planting, u, v, a, c):
            continue
        if not _stays_connected(beds, admitted, planting, table, plot, partner, u, v, a, c):
            continue
        _make_even(beds, admitted, planting, table, real, plot, partner, u, v, a, c)
        accepted += 1
        climbed += int(rise > 0)
        change += rise
    return scored, drawn, accepted, climbed, change


@_late(types.UniTuple(_INT, 5)(_BOARD, _MEETINGS, _RANDOM, _FLOAT, _FLOAT, _INT, _INT, _INT, _F1))
def anneal_ties(board, table, random, temperature, cooling, moves, tries, most_accepted, rises):
    """The same as `anneal`, within the moves that do not raise the sum of squared concurrences.

    Moves that lower it are made whatever they cost. Returns the moves scored, drawn, accepted, and
    accepted though they raise the objective, and the change of the sum.
    """
    beds, admitted, planting, metrics = _named(board)
    table, real = Concurrences(*table), _real(metrics)
    planted, t = planting.planted, _treatments(planting)
    scored, drawn, accepted, climbed, change, listed = 0, 0, 0, 0, 0, 0
    while scored < moves and drawn < tries and accepted < most_accepted:
        drawn += 1
        plot, partner, _, place = _draw(beds, random)
        u, v, a, c = _read(beds, planted, plot, partner)
        if not _may(admitted, planting, u, v, a, c):
            continue
        more = _more_squares(planting.copies, table, real, u, v, a, c)
        scored += 1
        allowed = temperature * DRAWS[place]
        temperature *= cooling
        if more > 0:
            continue
        rise, ratio, same = _single(beds, planted, metrics, t, u, v, a, c)
        if listed < len(rises):
            rises[listed] = rise
            listed += 1
        if ratio < LEAST_RATIO or (more == 0 and not rise <= allowed):
            continue
        if more == 0 and same:
            continue  # two blocks would only swap their names
        if _meets(beds, admitted, planting, u, v, a, c):
            _move_points(beds, planted, metrics, t, u, v, a, c)
            _make_even(beds, admitted, planting, table, real, plot, partner, u, v, a, c)
            accepted += 1
            climbed += int(rise > NOTHING)
            change += more
    return scored, drawn, accepted, climbed, change


@_late(types.Tuple((_INT, _INT, _INT, _INT, _FLOAT))(_BOARD, _MEETINGS, _INT, _INT, _INT, _FLOAT))
def best_even_move(board, table, begin, end, squares, below):
    """The best legal move of the blocks from begin to before end: by its squares first, then by its rise.

    Only moves that raise the sum of squared concurrences by less than `squares`, or by as much and the
    objective by less than `below`. Returns the moves scored, the move (plot −1 for none) and both rises.
    """
    beds, admitted, planting, metrics = _named(board)
    table, real = Concurrences(*table), _real(metrics)
    planted, t = planting.planted, _treatments(planting)
    scored, best_plot, best_partner, plots = np.int64(0), np.int64(-1), np.int64(-1), len(planted)
    for a in range(begin, end):
        first, last = _span(beds, a)
        pool = np.int64(beds.blocks[a, POOL_FIRST]) + np.int64(beds.blocks[a, POOL_PLOTS])
        loose = np.int64(beds.blocks[a, REACH]) - np.int64(beds.blocks[a, POOL_PLOTS])
        for plot in range(first, last):
            for choice in range(last, pool + loose):
                partner = choice if choice < pool else plots + np.int64(beds.loose[choice - pool])
                u, v, _, c = _read(beds, planted, plot, partner)
                if not _may(admitted, planting, u, v, a, c):
                    continue
                scored += 1
                more = _more_squares(planting.copies, table, real, u, v, a, c)
                if more > squares:
                    continue
                rise, ratio, _ = _single(beds, planted, metrics, t, u, v, a, c)
                if ratio < LEAST_RATIO or (more == squares and not rise < below):
                    continue
                if _meets(beds, admitted, planting, u, v, a, c):
                    squares, below, best_plot, best_partner = more, rise, plot, partner
    return scored, best_plot, best_partner, squares, below


@_late(_INT(_BOARD, _MEETINGS, _INT, _INT))
def make_even_move(board, table, plot, partner):
    """Make a legal move of a connected plan; returns how much the sum of squared concurrences rises."""
    beds, admitted, planting, metrics = _named(board)
    table, real = Concurrences(*table), _real(metrics)
    t = _treatments(planting)
    u, v, a, c = _read(beds, planting.planted, plot, partner)
    more = _more_squares(planting.copies, table, real, u, v, a, c)
    _renew(beds, planting.planted, metrics, a)
    if c >= 0:
        _renew(beds, planting.planted, metrics, c)
    _move_points(beds, planting.planted, metrics, t, u, v, a, c)
    _make_even(beds, admitted, planting, table, real, plot, partner, u, v, a, c)
    return more


# --- worst pair -----------------------------------------------------------------------------------
#
# A move changes the variance of the pair x, y by (γ p² − 2(1 + β) p q + α q²)/ratio with
# p = d'G(e_x − e_y) and q = (w − ½ s d)'G(e_x − e_y), a few entries of G and of the means. So pairs are
# tested in falling order of their variance, and a move is refused at the first one above the limit; one
# that passes is tested on all pairs.


class Worst(NamedTuple):
    """The pairs with the largest variances, in falling order."""

    first: Any
    second: Any
    """(most,) the two treatments of each pair"""
    variance: Any
    """(most,) as it was when the list was made"""
    state: Any
    """(3,) the number of pairs listed, the largest variance, and how far below it pairs are listed"""


LISTED, LARGEST, DEPTH = range(3)
"""Places in `Worst.state`."""

_WORST = types.Tuple((_U1, _U1, _F1, _F1))
EQUAL = 1e-11
"""Largest variances that differ by less are equal but for rounding."""


@_inner
def _list_worst(inverse, t, worst):
    """List the pairs with the largest variances afresh: O(t²)."""
    largest, most = 0.0, len(worst.first)
    for x in range(t):
        for y in range(x):
            largest = max(largest, inverse[x, x] + inverse[y, y] - 2.0 * inverse[x, y])
    depth, found, over = worst.state[DEPTH], 0, False
    least = largest - depth
    for x in range(t):
        for y in range(x):
            value = inverse[x, x] + inverse[y, y] - 2.0 * inverse[x, y]
            if value < least:
                continue
            if found == most:  # the least of the list gives way
                over = True
                if value <= worst.variance[most - 1]:
                    continue
                found -= 1
            place = found
            while place > 0 and worst.variance[place - 1] < value:
                worst.variance[place] = worst.variance[place - 1]
                worst.first[place] = worst.first[place - 1]
                worst.second[place] = worst.second[place - 1]
                place -= 1
            worst.variance[place], worst.first[place], worst.second[place] = value, x, y
            found += 1
    if over:
        worst.state[DEPTH] = 0.7 * depth
    elif found < most // 2:
        worst.state[DEPTH] = 1.3 * depth + 1e-9 * largest
    worst.state[LISTED], worst.state[LARGEST] = found, largest


@_hot
def _image_at(beds, metrics, u, v, a, c, i):
    """The images of d and of `w − ½ s d` at one treatment, up to a constant."""
    inverse, means = metrics.inverse, metrics.means[0]
    of_d = inverse[u, i] - inverse[v, i]
    other = means[c, i] if c >= 0 else 0.5 * (inverse[u, i] + inverse[v, i])
    return of_d, means[a, i] - other - 0.5 * _step(beds, a, c) * of_d


@_inner
def _largest_after(beds, planted, metrics, worst, t, u, v, a, c, limit):
    """The largest variance after a move, or any number above the limit where that is passed.

    The means of its blocks must be up to date.
    """
    inverse, work, step = metrics.inverse, metrics.work, _step(beds, a, c)
    alpha, beta, ww = _of_move(beds, planted, metrics, t, 0, u, v, a, c)
    one = 1.0 + beta
    ratio = one * one - alpha * (ww + step)
    one, gamma = one - 0.5 * step * alpha, ww - step * beta + 0.25 * step * step * alpha
    alpha, twice, gamma = alpha / ratio, 2.0 * one / ratio, gamma / ratio
    for place in range(np.int64(worst.state[LISTED])):
        x, y = np.int64(worst.first[place]), np.int64(worst.second[place])
        p_x, q_x = _image_at(beds, metrics, u, v, a, c, x)
        p_y, q_y = _image_at(beds, metrics, u, v, a, c, y)
        p, q = p_x - p_y, q_x - q_y
        before = inverse[x, x] + inverse[y, y] - 2.0 * inverse[x, y]
        after = before + gamma * p * p - twice * p * q + alpha * q * q
        if after > limit:
            return after
    of_d, of_w, largest = work[0], work[1], 0.0
    for x in range(_real(metrics)):
        of_d[x], of_w[x] = _image_at(beds, metrics, u, v, a, c, x)
        for y in range(x):
            p, q = of_d[x] - of_d[y], of_w[x] - of_w[y]
            before = inverse[x, x] + inverse[y, y] - 2.0 * inverse[x, y]
            largest = max(largest, before + gamma * p * p - twice * p * q + alpha * q * q)
        if largest > limit:
            return largest
    return largest


@_late(_FLOAT(_BOARD, _WORST))
def list_worst(board, worst):
    """List the worst pairs of a plan whose tables are up to date; returns the largest variance."""
    _, _, _, metrics = _named(board)
    worst = Worst(*worst)
    _list_worst(metrics.inverse, _real(metrics), worst)
    return worst.state[LARGEST]


@_late(types.UniTuple(_INT, 4)(_BOARD, _WORST, _RANDOM, _FLOAT, _FLOAT, _FLOAT, _INT, _INT, _INT))
def anneal_worst(board, worst, random, temperature, cooling, pull, moves, tries, most_accepted):
    """The same as `anneal` for the largest variance and `pull` times the objective."""
    beds, admitted, planting, metrics = _named(board)
    worst = Worst(*worst)
    planted, t = planting.planted, _treatments(planting)
    scored, drawn, accepted, climbed = 0, 0, 0, 0
    while scored < moves and drawn < tries and accepted < most_accepted:
        drawn += 1
        plot, partner, _, place = _draw(beds, random)
        u, v, a, c = _read(beds, planted, plot, partner)
        if not _may(admitted, planting, u, v, a, c):
            continue
        rise, ratio, same = _single(beds, planted, metrics, t, u, v, a, c)
        scored += 1
        allowed = temperature * DRAWS[place]
        temperature *= cooling
        if ratio < LEAST_RATIO or not rise < 1e300:
            continue
        if same:
            continue  # two blocks would only swap their names
        limit = worst.state[LARGEST] + allowed - pull * rise + EQUAL
        if _largest_after(beds, planted, metrics, worst, t, u, v, a, c, limit) > limit:
            continue
        if _meets(beds, admitted, planting, u, v, a, c):
            before = worst.state[LARGEST]
            _move_points(beds, planted, metrics, t, u, v, a, c)
            _plant(admitted, planting, plot, partner, u, v, a, c)
            _list_worst(metrics.inverse, _real(metrics), worst)
            accepted += 1
            climbed += int(worst.state[LARGEST] - before + pull * rise > EQUAL)
    return scored, drawn, accepted, climbed


@_late(types.Tuple((_INT, _INT, _INT, _FLOAT, _FLOAT))(_BOARD, _WORST, _INT, _INT, _FLOAT, _FLOAT))
def best_worst_move(board, worst, begin, end, largest, below):
    """The best legal move of the blocks from begin to before end: by the largest variance it leaves.

    Only moves that leave less than `largest`, or as much and raise the objective by less than `below`.
    Returns the moves scored, the move (plot −1 for none), the largest variance it leaves and its rise.
    """
    beds, admitted, planting, metrics = _named(board)
    worst = Worst(*worst)
    planted, t = planting.planted, _treatments(planting)
    scored, best_plot, best_partner, plots = np.int64(0), np.int64(-1), np.int64(-1), len(planted)
    for a in range(begin, end):
        first, last = _span(beds, a)
        pool = np.int64(beds.blocks[a, POOL_FIRST]) + np.int64(beds.blocks[a, POOL_PLOTS])
        loose = np.int64(beds.blocks[a, REACH]) - np.int64(beds.blocks[a, POOL_PLOTS])
        for plot in range(first, last):
            for choice in range(last, pool + loose):
                partner = choice if choice < pool else plots + np.int64(beds.loose[choice - pool])
                u, v, _, c = _read(beds, planted, plot, partner)
                if not _may(admitted, planting, u, v, a, c):
                    continue
                scored += 1
                rise, ratio, _ = _single(beds, planted, metrics, t, u, v, a, c)
                if ratio < LEAST_RATIO:
                    continue
                limit = largest + EQUAL if rise < below else largest - EQUAL
                after = _largest_after(beds, planted, metrics, worst, t, u, v, a, c, limit)
                if after <= limit and _meets(beds, admitted, planting, u, v, a, c):
                    largest, below, best_plot, best_partner = after, rise, plot, partner
    return scored, best_plot, best_partner, largest, below

"""The exchange kernel: legal moves, scored in O(1) each.

**Points.** Every treatment is a point, and every block is a point too: the mean of the treatments that
stand in it. With `G = (C + J/t)⁻¹` the squared distance of two points p and q,
`(p − q)' G (p − q)`, is the variance of their estimated difference; `Distances.variance` holds it for
all pairs of points, treatments first, then blocks. `Distances.worth` holds the same in the metric of
`H = G W G`, the slope of the objective `tr(W C⁺)`: what more information on a difference is worth.

**Moves.** To exchange u (block a) with v (block c), or to plant v for u on a plot of block a, changes
the information by `d w' + w d'` with `d = u − v` and

    exchange:  w = (a − c) − ½ s d,            s = 1/k_a + 1/k_c
    replace:   w = (a − ½(u + v)) − ½ s d,     s = 1/k_a

All of these are differences of points, so that `α = d'Gd`, `β = d'Gw`, `γ = w'Gw` are sums of at most
six entries of `variance`, and `a, b, c`, the same in the metric of H, of `worth`. Then

    ratio = (1 + β)² − αγ                       pdet(C) grows by this factor
    rise  = (γ a − 2(1 + β) b + α c) / ratio    tr(W C⁺) grows by this much

**Accepted moves** cost O((t + b)² + n). With `g = Gd`, `h = Gw`, `p = Hd`, `q = Hw`:

    G' = G + g x' + h y',   x = (γ g − (1 + β) h)/ratio,   y = (α h − (1 + β) g)/ratio
    H' = H + x s' + s x' + y z' + z y',   s = p + ½ a x + ½ b y,   z = q + ½ c y + ½ b x

and the points a and c move by ∓d/k. The vectors are summed afresh from the distances between
treatments, and their values at blocks from the contents, at every accepted move: read from the rows
of the blocks instead, the error would grow by a constant factor per move. Distances do not change
when a vector gets a constant added, so vectors are only known up to one.

One file on purpose: the compiler's cache does not notice a change in a function of another file.
Everything here also runs as plain Python, with NUMBA_DISABLE_JIT=1.
"""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np
from numba import njit, types

LEAST_RATIO = 1e-3
"""A move that shrinks pdet(C) further than this all but disconnects the plan: it is refused."""

NOTHING = 1e-12
"""A rise or a squared distance below this is nothing but rounding."""

DRAWS = -np.log((np.arange(1024) + 0.5) / 1024)
"""Quantiles of the exponential law: how far uphill a move may go, over the temperature."""

FULL, PINNED = 1 << 20, 1 << 21
"""Flags in `Planting.gate`: no plot more, no plot less of the treatment in the block."""

FIRST, PLOTS, POOL_FIRST, POOL_PLOTS, REACH = range(5)
"""Columns of `Beds.blocks`: the first plot of a block and its number of plots; the first and the number
of the plots that it may exchange with (its replicate's, or all outside); that number and, outside
replicates, the number of loose treatments."""

LEAST, MOST = range(2)
"""Layers of the ranges in `Admitted`."""


class Beds(NamedTuple):
    """Where plots lie: those of a block side by side, and blocks of a replicate too."""

    home: Any
    """(n,) block of each plot"""
    blocks: Any
    """(b, 5) see FIRST and the other columns"""
    share: Any
    """(b,) one over the plots of the block"""
    loose: Any
    """treatments whose replication may change"""


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
    """(t + b or n,) room for numbers of points or plots"""


class Distances(NamedTuple):
    """Squared distances of points, (t+b, t+b); the part (treatments, blocks) is not kept."""

    variance: Any
    worth: Any
    work: Any
    """(8, t + b or n) room for vectors"""
    overall: bool
    """True where −log pdet(C)/(t−1) is wanted and not a trace; then `worth` is not kept"""


_I1, _I2, _I3 = types.int32[::1], types.int32[:, ::1], types.int32[:, :, ::1]
_U1, _U2 = types.uint32[::1], types.uint32[:, ::1]
_F1, _F2 = types.float64[::1], types.float64[:, ::1]
_YES, _INT, _FLOAT = types.boolean, types.int64, types.float64
_RANDOM = types.uint64[::1]
_BOARD = types.Tuple(
    (
        types.Tuple((_U1, _U2, _F1, _U1)),
        types.Tuple((_I2, _I3, _I3, _I2, _YES, _YES)),
        types.Tuple((_U1, _I1, _I2, _I2, _I2, _U1)),
        types.Tuple((_F2, _F2, _F2, _YES)),
    )
)

# No function here makes or keeps an array, so none counts references to arrays (`_nrt`): counting is
# atomic and would take nine tenths of the time. Numba compiles its own sorting in this way.
_plainly = {"nogil": True, "error_model": "numpy", "_nrt": False}
_hot = njit(inline="always", **_plainly)
_inner = njit(no_cpython_wrapper=True, no_cfunc_wrapper=True, **_plainly)


def _entry(signature):
    return njit([signature], cache=True, **_plainly)


@_hot
def _named(board):
    """The parts of a board by name; entry points take plain tuples, which are handed over faster."""
    beds, admitted, planting, distances = board
    return Beds(*beds), Admitted(*admitted), Planting(*planting), Distances(*distances)


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
    """A random move, legal or not, and a place in `DRAWS`, out of one random number."""
    bits = _next(random)
    plot = _below(bits >> np.uint64(37), len(beds.home))
    a = np.int64(beds.home[plot])
    pool = np.int64(beds.blocks[a, POOL_PLOTS])
    choice = _below(bits >> np.uint64(10), beds.blocks[a, REACH])
    if choice < pool:
        partner = np.int64(beds.blocks[a, POOL_FIRST]) + choice
    else:
        partner = len(beds.home) + np.int64(beds.loose[choice - pool])
    return plot, partner, np.int64(bits & np.uint64(1023))


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
def _meets(beds, admitted, planting, u, v, a, c):
    """Whether a move keeps all limits on meetings: O(k)."""
    if not admitted.any_meetings:
        return True
    if not _within(admitted, planting, u, v, _meeting(planting.copies, u, v, a, c)):
        return False
    if not _meets_in(beds, admitted, planting, u, v, a, c, a):
        return False
    return c < 0 or _meets_in(beds, admitted, planting, u, v, a, c, c)


# --- planting -------------------------------------------------------------------------------------


@_inner
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


@_inner
def _plant(admitted, planting, plot, partner, u, v, a, c):
    """Make a move in the contents; the distances are not touched."""
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


@_hot
def _corrected(dd, dw, ww, step):
    """`d'd`, `d'w`, `w'w` for `w − ½ step d` in place of w."""
    return dd, dw - 0.5 * step * dd, ww - step * dw + 0.25 * step * step * dd


@_hot
def _products(share, table, t, u, v, a, c):
    """`d'd`, `d'w`, `w'w` of a move in the metric of a table of squared distances."""
    dd = table[u, v]
    if c >= 0:
        dw = 0.5 * ((table[t + c, u] - table[t + a, u]) - (table[t + c, v] - table[t + a, v]))
        return _corrected(dd, dw, table[t + a, t + c], share[a] + share[c])
    dw = 0.5 * (table[t + a, v] - table[t + a, u])
    ww = 0.5 * (table[t + a, u] + table[t + a, v]) - 0.25 * dd
    return _corrected(dd, dw, ww, share[a])


@_hot
def _judged(overall, t, in_g, in_h):
    """How much a move raises the objective, and the ratio of pseudo-determinants.

    For the overall aim the rise is a lower bound, `−log x ≥ 1 − x`, that orders moves alike.
    """
    alpha, beta, gamma = in_g
    a, b, c = in_h
    ratio = (1.0 + beta) * (1.0 + beta) - alpha * gamma
    if overall:
        return (1.0 - ratio) / (t - 1), ratio
    return (gamma * a - 2.0 * (1.0 + beta) * b + alpha * c) / ratio, ratio


@_hot
def _score(share, distances, t, u, v, a, c):
    in_g = _products(share, distances.variance, t, u, v, a, c)
    in_h = in_g if distances.overall else _products(share, distances.worth, t, u, v, a, c)
    return _judged(distances.overall, t, in_g, in_h)


@_hot
def _true_rise(overall, t, rise, ratio):
    return -np.log(ratio) / (t - 1) if overall else rise


# --- accepted moves -------------------------------------------------------------------------------


@_inner
def _add_block(beds, planted, table, t, block, factor, vector):
    """Add to a vector over the treatments the mean row of a block's treatments, times a factor."""
    factor *= beds.share[block]
    begin, end = _span(beds, block)
    for plot in range(begin, end):
        j = np.int64(planted[plot])
        for i in range(t):
            vector[i] += factor * table[j, i]


@_inner
def _extend(beds, planted, t, first, second):
    """The values of two vectors at the blocks: means over their treatments."""
    for block in range(len(beds.blocks)):
        in_first, in_second = 0.0, 0.0
        begin, end = _span(beds, block)
        for plot in range(begin, end):
            i = np.int64(planted[plot])
            in_first += first[i]
            in_second += second[i]
        first[t + block] = in_first * beds.share[block]
        second[t + block] = in_second * beds.share[block]


@_inner
def _images(beds, planted, table, t, u, v, a, c, of_d, of_w):
    """Fill in the images of d and w in the metric of a table, at all points, up to a constant."""
    step = beds.share[a]
    for i in range(t):
        of_d[i] = 0.5 * (table[v, i] - table[u, i])
    if c >= 0:
        step += beds.share[c]
        for i in range(t):
            of_w[i] = -0.5 * step * of_d[i]
        _add_block(beds, planted, table, t, c, 0.5, of_w)
    else:
        for i in range(t):
            of_w[i] = 0.25 * (table[u, i] + table[v, i]) - 0.5 * step * of_d[i]
    _add_block(beds, planted, table, t, a, -0.5, of_w)
    _extend(beds, planted, t, of_d, of_w)


@_inner
def _product_with_w(share, vector, t, u, v, a, c):
    """`w'` times a vector that is known at all points."""
    d = vector[u] - vector[v]
    if c >= 0:
        return vector[t + a] - vector[t + c] - 0.5 * (share[a] + share[c]) * d
    return vector[t + a] - 0.5 * (vector[u] + vector[v]) - 0.5 * share[a] * d


@_inner
def _grow(table, t, first, second, third, fourth):
    """Distances after the metric grew by `first second' + third fourth'`, a symmetric sum."""
    points = table.shape[0]
    for i in range(points):
        f, s, h, r = first[i], second[i], third[i], fourth[i]
        for j in range(t if i < t else points):
            table[i, j] += (f - first[j]) * (s - second[j]) + (h - third[j]) * (r - fourth[j])


@_inner
def _shift(table, t, block, step, of_d, dd):
    """Distances after the point of a block moved by `step·d`; `of_d` is the image of d."""
    point, points = t + block, table.shape[0]
    centre = of_d[point]
    for i in range(points):
        table[point, i] += 2.0 * step * (centre - of_d[i]) + step * step * dd
    table[point, point] = 0.0
    for i in range(t, points):
        table[i, point] = table[point, i]
    of_d[point] += step * dd


@_inner
def _shift_blocks(share, table, t, u, v, a, c, of_d):
    """Distances after u left block a for v, and v left block c for u."""
    dd = of_d[u] - of_d[v]
    _shift(table, t, a, -share[a], of_d, dd)
    if c >= 0:
        _shift(table, t, c, share[c], of_d, dd)


@_inner
def _move_points(beds, planted, distances, t, u, v, a, c):
    """Bring the distances up to date with a move that is about to be made."""
    variance, worth, work, share = distances.variance, distances.worth, distances.work, beds.share
    points = variance.shape[0]
    g, h, p, q = work[0], work[1], work[2], work[3]
    x, y, s, z = work[4], work[5], work[6], work[7]
    _images(beds, planted, variance, t, u, v, a, c, g, h)
    alpha, one = g[u] - g[v], 1.0 + h[u] - h[v]
    gamma = _product_with_w(share, h, t, u, v, a, c)
    ratio = one * one - alpha * gamma
    for i in range(points):
        x[i] = (gamma * g[i] - one * h[i]) / ratio
        y[i] = (alpha * h[i] - one * g[i]) / ratio
    _grow(variance, t, g, x, h, y)
    x_d, y_d = x[u] - x[v], y[u] - y[v]
    for i in range(points):
        g[i] += g[i] * x_d + h[i] * y_d
    _shift_blocks(share, variance, t, u, v, a, c, g)
    if distances.overall:
        return
    _images(beds, planted, worth, t, u, v, a, c, p, q)
    a2, b2 = p[u] - p[v], q[u] - q[v]
    c2 = _product_with_w(share, q, t, u, v, a, c)
    for i in range(points):
        s[i] = 2.0 * p[i] + a2 * x[i] + b2 * y[i]  # twice s and z: H' − H is x s' + y z', symmetrised
        z[i] = 2.0 * q[i] + c2 * y[i] + b2 * x[i]
    _grow(worth, t, x, s, y, z)
    s_d, z_d = 0.5 * (s[u] - s[v]), 0.5 * (z[u] - z[v])
    for i in range(points):
        p[i] += x[i] * s_d + 0.5 * s[i] * x_d + y[i] * z_d + 0.5 * z[i] * y_d
    _shift_blocks(share, worth, t, u, v, a, c, p)


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


# --- scanning -------------------------------------------------------------------------------------


@_hot
def _candidates(beds, planting, distances, t, a):
    """List the plots after block a that may exchange with it, with what their scores share.

    The pull of v (block c) towards a is its squared distance to a less that to c: `d'w` of an exchange
    is half the sum of two pulls.
    """
    variance, worth, room, work = distances.variance, distances.worth, planting.room, distances.work
    begin = np.int64(beds.blocks[a, FIRST]) + np.int64(beds.blocks[a, PLOTS])
    end = np.int64(beds.blocks[a, POOL_FIRST]) + np.int64(beds.blocks[a, POOL_PLOTS])
    found = 0
    for plot in range(begin, end):
        v, c = np.int64(planting.planted[plot]), np.int64(beds.home[plot])
        room[found] = plot
        work[0, found] = variance[t + a, v] - variance[t + c, v]
        work[1, found] = variance[t + a, t + c]
        if not distances.overall:
            work[2, found] = worth[t + a, v] - worth[t + c, v]
            work[3, found] = worth[t + a, t + c]
        found += int(((planting.gate[a, v] & FULL) == 0) & (planting.gate[c, v] < PINNED))
    return found


@_inner
def _scan_exchanges(beds, admitted, planting, distances, t, a, below):
    """The best exchange of block a with a later block that rises less than `below`."""
    planted, room, work = planting.planted, planting.room, distances.work
    variance, worth, overall = distances.variance, distances.worth, distances.overall
    scored, best_plot, best_partner = 0, -1, -1
    candidates = _candidates(beds, planting, distances, t, a)
    begin, end = _span(beds, a)
    for plot in range(begin, end):
        u = np.int64(planted[plot])
        if planting.gate[a, u] >= PINNED:
            continue
        for i in range(candidates):
            partner = np.int64(room[i])
            v, c = np.int64(planted[partner]), np.int64(beds.home[partner])
            if planting.gate[c, u] & FULL or u == v:
                continue
            if admitted.any_apart and not _may(admitted, planting, u, v, a, c):
                continue
            scored += 1
            step = beds.share[a] + beds.share[c]
            dw = 0.5 * (variance[t + c, u] - variance[t + a, u] + work[0, i])
            in_g = in_h = _corrected(variance[u, v], dw, work[1, i], step)
            if not overall:
                dw = 0.5 * (worth[t + c, u] - worth[t + a, u] + work[2, i])
                in_h = _corrected(worth[u, v], dw, work[3, i], step)
            rise, ratio = _judged(overall, t, in_g, in_h)
            if rise < below and ratio >= LEAST_RATIO and _meets(beds, admitted, planting, u, v, a, c):
                below, best_plot, best_partner = rise, plot, partner
    return scored, best_plot, best_partner, below


@_inner
def _scan_replacements(beds, admitted, planting, distances, t, a, below):
    """The best replacement on a plot of block a that rises less than `below`."""
    scored, best_plot, best_partner, c = 0, -1, -1, np.int64(-1)
    loose = np.int64(beds.blocks[a, REACH]) - np.int64(beds.blocks[a, POOL_PLOTS])
    begin, end = _span(beds, a)
    for plot in range(begin, end):
        u = np.int64(planting.planted[plot])
        for i in range(loose):
            v = np.int64(beds.loose[i])
            if not _may(admitted, planting, u, v, a, c):
                continue
            scored += 1
            rise, ratio = _score(beds.share, distances, t, u, v, a, c)
            if rise < below and ratio >= LEAST_RATIO and _meets(beds, admitted, planting, u, v, a, c):
                below, best_plot, best_partner = rise, plot, len(planting.planted) + v
    return scored, best_plot, best_partner, below


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
    which plots those are. The distances are left behind. Returns the moves made and the parts left.
    """
    beds, admitted, planting, _ = _named(board)
    planted, t, made = planting.planted, _treatments(planting), 0
    parts = _parts(beds, planting, t)
    for _ in range(tries):
        if join and parts == 1:
            break
        plot, partner, _ = _draw(beds, random)
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
    beds, admitted, planting, distances = _named(board)
    t = _treatments(planting)
    u, v, a, c = _read(beds, planting.planted, plot, partner)
    rise, ratio = _score(beds.share, distances, t, u, v, a, c)
    _move_points(beds, planting.planted, distances, t, u, v, a, c)
    _plant(admitted, planting, plot, partner, u, v, a, c)
    return _true_rise(distances.overall, t, rise, ratio)


@_entry(types.UniTuple(_INT, 4)(_BOARD, _RANDOM, _FLOAT, _FLOAT, _INT, _INT, _INT, _F1))
def anneal(board, random, temperature, cooling, moves, tries, most_accepted, rises):
    """Simulated annealing (Metropolis et al. 1953; Kirkpatrick, Gelatt & Vecchi 1983).

    Ends after `moves` scored moves, `tries` drawn ones or `most_accepted` accepted ones, whichever
    comes first; the temperature is multiplied by `cooling` after each scored move. The first rises are
    written to `rises`, as many as it has room for. Returns the moves scored, drawn, accepted, and accepted
    though they raise the objective.
    """
    beds, admitted, planting, distances = _named(board)
    planted, t = planting.planted, _treatments(planting)
    scored, drawn, accepted, climbed = 0, 0, 0, 0
    while scored < moves and drawn < tries and accepted < most_accepted:
        drawn += 1
        plot, partner, place = _draw(beds, random)
        u, v, a, c = _read(beds, planted, plot, partner)
        if not _may(admitted, planting, u, v, a, c):
            continue
        rise, ratio = _score(beds.share, distances, t, u, v, a, c)
        if scored < len(rises):
            rises[scored] = rise
        scored += 1
        allowed = temperature * DRAWS[place]
        temperature *= cooling
        if not (rise <= allowed and ratio >= LEAST_RATIO):
            continue
        if _true_rise(distances.overall, t, rise, ratio) > allowed:
            continue
        if abs(rise) < NOTHING and _products(beds.share, distances.variance, t, u, v, a, c)[2] < NOTHING:
            continue  # w = 0: two blocks alike but for u and v would only swap their names
        if _meets(beds, admitted, planting, u, v, a, c):
            _move_points(beds, planted, distances, t, u, v, a, c)
            _plant(admitted, planting, plot, partner, u, v, a, c)
            accepted += 1
            climbed += int(rise > NOTHING)
    return scored, drawn, accepted, climbed


@_entry(types.Tuple((_INT, _INT, _INT, _FLOAT))(_BOARD, _INT, _INT, _FLOAT))
def best_move(board, begin, end, below):
    """The legal move of the blocks from begin to before end that rises least and less than `below`.

    Exchanges are looked at from the block that comes first, and limits on meetings asked of better
    moves alone. Returns the moves scored, the move (plot −1 for none) and its rise, for the overall
    aim the lower bound by which moves are ordered.
    """
    beds, admitted, planting, distances = _named(board)
    t = _treatments(planting)
    scored, best_plot, best_partner = 0, -1, -1
    for a in range(begin, end):
        looked, plot, partner, rise = _scan_exchanges(beds, admitted, planting, distances, t, a, below)
        scored += looked
        if plot >= 0:
            best_plot, best_partner, below = plot, partner, rise
        if beds.blocks[a, REACH] == beds.blocks[a, POOL_PLOTS]:
            continue
        looked, plot, partner, rise = _scan_replacements(beds, admitted, planting, distances, t, a, below)
        scored += looked
        if plot >= 0:
            best_plot, best_partner, below = plot, partner, rise
    return scored, best_plot, best_partner, below


@_entry(types.UniTuple(_INT, 5)(_BOARD, _RANDOM, _FLOAT, _FLOAT, _FLOAT, _INT, _INT, _INT, _INT))
def cross(board, random, temperature, cooling, price, breaches, moves, tries, most_accepted):
    """Simulated annealing that may break rules, at a price for each breach.

    Like `anneal`, but for rules other than block sizes and replicates. `breaches` is how many there are to
    begin with. Returns the moves scored, drawn, accepted, accepted though they raise the objective, and the
    breaches left.
    """
    beds, admitted, planting, distances = _named(board)
    planted, t = planting.planted, _treatments(planting)
    scored, drawn, accepted, climbed = 0, 0, 0, 0
    while scored < moves and drawn < tries and accepted < most_accepted:
        drawn += 1
        plot, partner, place = _draw(beds, random)
        u, v, a, c = _read(beds, planted, plot, partner)
        if not _keeps_counts(admitted, u, v, a, c):
            continue
        scored += 1
        allowed = temperature * DRAWS[place]
        temperature *= cooling
        change = _breaks(admitted, planting, u, v, a, c)
        hope = breaches if admitted.any_meetings else 0
        rise, ratio = _score(beds.share, distances, t, u, v, a, c)
        if not (rise + price * (change - hope) <= allowed and ratio >= LEAST_RATIO):
            continue
        change += _breaks_meetings(admitted, planting, u, v, a, c)
        if _true_rise(distances.overall, t, rise, ratio) + price * change > allowed:
            continue
        same = change == 0 and abs(rise) < NOTHING  # perhaps two blocks that would swap their names
        if same and _products(beds.share, distances.variance, t, u, v, a, c)[2] < NOTHING:
            continue
        _move_points(beds, planted, distances, t, u, v, a, c)
        _plant(admitted, planting, plot, partner, u, v, a, c)
        breaches += change
        accepted += 1
        climbed += int(rise > NOTHING)
    return scored, drawn, accepted, climbed, breaches


@_entry(types.UniTuple(_INT, 2)(_BOARD, _RANDOM, _FLOAT, _INT, _INT))
def mend(board, random, temperature, breaches, tries):
    """Draw random moves until no rule is broken, whatever they are worth; distances are left behind.

    A move that adds so many breaches is made with the odds that annealing gives it. Returns the breaches
    left and the moves drawn.
    """
    beds, admitted, planting, _ = _named(board)
    drawn = 0
    while breaches > 0 and drawn < tries:
        drawn += 1
        plot, partner, place = _draw(beds, random)
        u, v, a, c = _read(beds, planting.planted, plot, partner)
        if not _keeps_counts(admitted, u, v, a, c):
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

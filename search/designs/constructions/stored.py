"""The stored recipes: what the orbit engine found, so that it need not be found again.

Each says with which effort (see `orbits`) and in how many seconds its group gave it, on one slow core; the
groups that were tried before are not counted.
"""

from __future__ import annotations

from dataclasses import dataclass

from search.designs.constructions.groups import Factor, Group
from search.designs.records import Blocks


@dataclass(frozen=True, slots=True)
class Recipe:
    """A group, base blocks whose orbits are the design, and how they were found."""

    group: Group
    base: Blocks
    found: str


RECIPES: dict[tuple[int, int, int], Recipe] = {
    (6, 3, 2): Recipe(
        Group((Factor(5),), 1, 1, (1,)),
        ((0, 1, 5), (0, 1, 3)),
        "orbit engine, light effort, 0.0 s",
    ),
    (9, 4, 3): Recipe(
        Group((Factor(9, True),), 1, 0, (1,)),
        ((1, 2, 4, 8),),
        "orbit engine, light effort, 0.0 s",
    ),
    (10, 3, 2): Recipe(
        Group((Factor(9, True),), 1, 1, (8,)),
        ((0, 1, 9), (0, 1, 2), (0, 3, 7), (0, 3, 7)),
        "orbit engine, light effort, 0.0 s",
    ),
    (10, 4, 2): Recipe(
        Group((Factor(9, True),), 1, 1, (0,)),
        ((0, 1, 2, 9), (0, 3, 6, 9), (0, 1, 5, 8)),
        "orbit engine, light effort, 0.0 s",
    ),
    (10, 5, 4): Recipe(
        Group((Factor(9),), 1, 1, (1,)),
        ((0, 1, 2, 4, 9), (0, 1, 3, 5, 6)),
        "orbit engine, light effort, 0.0 s",
    ),
    (11, 3, 3): Recipe(
        Group((Factor(11),), 1, 0, (2,)),
        ((0, 1, 10),),
        "orbit engine, light effort, 0.0 s",
    ),
    (11, 5, 2): Recipe(
        Group((Factor(11),), 1, 0, (3,)),
        ((1, 3, 4, 5, 9),),
        "orbit engine, light effort, 0.0 s",
    ),
    (12, 3, 2): Recipe(
        Group(
            (
                Factor(3),
                Factor(4, True),
            ),
            1,
            0,
            (
                1,
                3,
            ),
        ),
        ((0, 2, 3), (0, 5, 10), (0, 4, 8), (0, 4, 8)),
        "orbit engine, light effort, 0.0 s",
    ),
    (12, 4, 3): Recipe(
        Group((Factor(3),), 4, 0, (2,), (3,)),
        ((1, 2, 10, 11), (0, 3, 7, 8), (0, 4, 5, 9), (0, 3, 6, 10)),
        "orbit engine, light effort, 0.0 s",
    ),
    (13, 3, 1): Recipe(
        Group((Factor(13),), 1, 0, (1,)),
        ((0, 1, 4), (0, 2, 7)),
        "orbit engine, light effort, 0.0 s",
    ),
    (13, 5, 5): Recipe(
        Group((Factor(13),), 1, 0, (2,)),
        ((0, 1, 5, 8, 12),),
        "orbit engine, light effort, 0.0 s",
    ),
    (13, 6, 5): Recipe(
        Group((Factor(13),), 1, 0, (2,)),
        ((1, 3, 4, 9, 10, 12),),
        "orbit engine, light effort, 0.0 s",
    ),
    (14, 7, 6): Recipe(
        Group((Factor(13),), 1, 1, (1,)),
        ((0, 1, 2, 3, 5, 9, 13), (0, 1, 2, 4, 7, 9, 10)),
        "orbit engine, light effort, 0.01 s",
    ),
    (15, 5, 4): Recipe(
        Group((Factor(7),), 2, 1, (2,)),
        ((0, 8, 9, 11, 14), (1, 2, 4, 7, 14), (0, 1, 2, 4, 7), (0, 1, 7, 9, 10)),
        "orbit engine, light effort, 0.0 s",
    ),
    (15, 6, 5): Recipe(
        Group((Factor(5),), 3, 0, (2,)),
        ((0, 5, 11, 12, 13, 14), (0, 1, 5, 7, 10, 13), (0, 6, 7, 8, 9, 10), (1, 2, 3, 4, 5, 10)),
        "orbit engine, light effort, 0.0 s",
    ),
    (16, 5, 4): Recipe(
        Group((Factor(16, True),), 1, 0, (1,)),
        ((1, 3, 5, 8, 15),),
        "orbit engine, light effort, 0.0 s",
    ),
    (16, 6, 2): Recipe(
        Group((Factor(16, True),), 1, 0, (31,)),
        ((1, 2, 10, 11, 13, 15),),
        "orbit engine, light effort, 0.0 s",
    ),
    (16, 6, 3): Recipe(
        Group((Factor(4),), 4, 0, (1,), (3,)),
        ((0, 2, 5, 7, 12, 14), (0, 1, 6, 7, 12, 13), (0, 2, 4, 6, 8, 10), (0, 1, 4, 5, 8, 9)),
        "orbit engine, light effort, 0.01 s",
    ),
    (17, 4, 3): Recipe(
        Group((Factor(17),), 1, 0, (3,)),
        ((1, 4, 13, 16),),
        "orbit engine, light effort, 0.05 s",
    ),
    (17, 5, 5): Recipe(
        Group((Factor(17),), 1, 0, (2,)),
        ((0, 1, 5, 12, 16),),
        "orbit engine, light effort, 0.01 s",
    ),
    (17, 8, 7): Recipe(
        Group((Factor(17),), 1, 0, (2,)),
        ((1, 2, 4, 8, 9, 13, 15, 16), (3, 5, 6, 7, 10, 11, 12, 14)),
        "orbit engine, light effort, 0.07 s",
    ),
    (18, 3, 2): Recipe(
        Group((Factor(17),), 1, 1, (16,)),
        ((1, 16, 17), (0, 1, 16), (0, 3, 8), (0, 4, 10)),
        "orbit engine, light effort, 0.0 s",
    ),
    (18, 6, 5): Recipe(
        Group(
            (
                Factor(2),
                Factor(9, True),
            ),
            1,
            0,
            (
                1,
                4,
            ),
        ),
        (
            (0, 1, 2, 9, 10, 11),
            (0, 1, 2, 9, 10, 11),
            (0, 3, 6, 9, 12, 15),
            (0, 3, 6, 9, 12, 15),
            (0, 4, 8, 9, 13, 17),
            (1, 5, 6, 11, 12, 16),
            (1, 3, 8, 11, 13, 15),
            (1, 3, 4, 11, 15, 17),
            (1, 2, 3, 5, 6, 7),
        ),
        "orbit engine, light effort, 0.05 s",
    ),
    (18, 9, 8): Recipe(
        Group((Factor(17),), 1, 1, (1,)),
        ((0, 1, 2, 4, 5, 6, 9, 11, 17), (0, 3, 5, 6, 7, 9, 12, 13, 14)),
        "orbit engine, light effort, 0.3 s",
    ),
    (19, 3, 1): Recipe(
        Group((Factor(19),), 1, 0, (4,)),
        ((1, 7, 11),),
        "orbit engine, light effort, 0.0 s",
    ),
    (19, 4, 2): Recipe(
        Group((Factor(19),), 1, 0, (4,)),
        ((0, 1, 7, 11),),
        "orbit engine, light effort, 0.01 s",
    ),
    (19, 6, 5): Recipe(
        Group((Factor(19),), 1, 0, (18,)),
        ((1, 7, 8, 11, 12, 18), (2, 3, 5, 14, 16, 17), (4, 6, 9, 10, 13, 15)),
        "orbit engine, light effort, 0.18 s",
    ),
    (19, 9, 4): Recipe(
        Group((Factor(19),), 1, 0, (7,)),
        ((1, 4, 5, 6, 7, 9, 11, 16, 17),),
        "orbit engine, light effort, 0.0 s",
    ),
    (20, 4, 3): Recipe(
        Group(
            (
                Factor(4, True),
                Factor(5),
            ),
            1,
            0,
            (
                1,
                1,
            ),
        ),
        ((0, 1, 2, 3), (0, 5, 10, 15), (0, 5, 10, 15), (0, 5, 10, 15), (0, 6, 12, 18)),
        "orbit engine, light effort, 0.09 s",
    ),
    (20, 5, 4): Recipe(
        Group((Factor(19),), 1, 1, (7,)),
        ((0, 1, 7, 11, 19), (0, 1, 2, 4, 14)),
        "orbit engine, light effort, 0.2 s",
    ),
    (21, 3, 1): Recipe(
        Group((Factor(21),), 1, 0, (13,)),
        ((0, 2, 5), (0, 4, 10), (3, 10, 17), (0, 1, 13)),
        "orbit engine, light effort, 0.01 s",
    ),
    (21, 6, 3): Recipe(
        Group((Factor(7),), 3, 0, (2,)),
        ((0, 1, 2, 4, 7, 14), (0, 7, 8, 9, 11, 14), (0, 7, 14, 15, 16, 18), (0, 1, 9, 13, 17, 19)),
        "orbit engine, light effort, 0.02 s",
    ),
    (21, 6, 4): Recipe(
        Group((Factor(5),), 4, 1, (4,), (3,)),
        (
            (0, 5, 10, 16, 19, 20),
            (0, 5, 10, 17, 18, 20),
            (0, 1, 2, 3, 4, 20),
            (0, 1, 2, 3, 4, 20),
            (0, 5, 10, 15, 16, 19),
            (0, 5, 10, 15, 17, 18),
            (0, 1, 7, 9, 13, 15),
        ),
        "orbit engine, light effort, 0.02 s",
    ),
    (21, 6, 5): Recipe(
        Group((Factor(21),), 1, 0, (8,)),
        ((0, 3, 7, 10, 14, 17), (0, 1, 3, 8, 9, 12), (0, 1, 2, 4, 6, 15)),
        "orbit engine, light effort, 0.08 s",
    ),
    (21, 9, 6): Recipe(
        Group((Factor(5),), 4, 1, (4,), (3,)),
        ((0, 1, 4, 5, 6, 9, 10, 11, 14), (0, 1, 4, 5, 7, 8, 16, 19, 20), (1, 4, 6, 9, 12, 13, 15, 16, 19)),
        "orbit engine, light effort, 0.07 s",
    ),
    (21, 10, 9): Recipe(
        Group((Factor(21),), 1, 0, (1,)),
        ((0, 1, 5, 6, 7, 8, 9, 11, 14, 17), (0, 2, 4, 6, 7, 8, 9, 14, 17, 18)),
        "orbit engine, light effort, 0.05 s",
    ),
    (22, 4, 2): Recipe(
        Group((Factor(21),), 1, 1, (13,)),
        ((3, 10, 17, 21), (3, 10, 17, 21), (1, 2, 5, 13), (2, 3, 5, 18), (1, 3, 13, 18)),
        "orbit engine, light effort, 0.01 s",
    ),
    (22, 7, 4): Recipe(
        Group((Factor(22),), 1, 0, (1,)),
        ((0, 3, 8, 10, 11, 12, 16), (0, 4, 7, 9, 10, 11, 17)),
        "orbit engine, 200000 steps, 0.06 s",
    ),
    (25, 3, 1): Recipe(
        Group((Factor(25, True),), 1, 0, (8,)),
        ((9, 10, 11), (0, 2, 10)),
        "orbit engine, light effort, 0.0 s",
    ),
    (25, 4, 1): Recipe(
        Group((Factor(25, True),), 1, 0, (0,)),
        ((0, 1, 5, 12), (0, 2, 8, 17)),
        "orbit engine, light effort, 0.01 s",
    ),
    (25, 9, 6): Recipe(
        Group((Factor(6),), 4, 1, (5,), (3,)),
        (
            (0, 3, 6, 9, 13, 16, 19, 22, 24),
            (0, 1, 5, 14, 15, 16, 18, 19, 23),
            (0, 2, 4, 7, 9, 11, 18, 20, 22),
            (0, 1, 5, 6, 7, 11, 12, 13, 17),
            (0, 2, 4, 6, 8, 10, 12, 14, 16),
        ),
        "orbit engine, light effort, 0.95 s",
    ),
    (25, 10, 6): Recipe(
        Group((Factor(5),), 5, 0, (4,), (3,)),
        (
            (1, 4, 6, 9, 11, 14, 16, 17, 18, 19),
            (0, 1, 4, 7, 8, 17, 18, 20, 22, 23),
            (0, 2, 3, 5, 11, 14, 16, 19, 22, 23),
            (0, 1, 4, 5, 6, 9, 10, 11, 14, 20),
        ),
        "orbit engine, medium effort, 0.26 s",
    ),
    (26, 6, 3): Recipe(
        Group((Factor(25, True),), 1, 1, (24,)),
        ((0, 1, 2, 3, 4, 25), (0, 5, 10, 15, 20, 25), (5, 6, 11, 15, 22, 23), (5, 10, 12, 16, 19, 22)),
        "orbit engine, light effort, 0.02 s",
    ),
    (27, 13, 6): Recipe(
        Group((Factor(27, True),), 1, 0, (2,)),
        ((1, 4, 6, 7, 9, 13, 14, 15, 16, 17, 19, 20, 24),),
        "orbit engine, light effort, 0.06 s",
    ),
    (28, 4, 1): Recipe(
        Group((Factor(9, True),), 3, 1, (2,)),
        ((0, 9, 18, 27), (1, 2, 12, 15), (3, 6, 19, 20), (10, 11, 21, 24)),
        "orbit engine, light effort, 0.0 s",
    ),
    (28, 7, 2): Recipe(
        Group((Factor(9),), 3, 1, (4,), (3,)),
        ((0, 1, 9, 13, 18, 25, 27), (0, 1, 3, 5, 11, 14, 24)),
        "orbit engine, light effort, 0.01 s",
    ),
    (29, 7, 3): Recipe(
        Group((Factor(29),), 1, 0, (7,)),
        ((1, 7, 16, 20, 23, 24, 25), (2, 3, 11, 14, 17, 19, 21)),
        "orbit engine, light effort, 0.04 s",
    ),
    (29, 8, 4): Recipe(
        Group((Factor(29),), 1, 0, (7,)),
        ((0, 1, 7, 16, 20, 23, 24, 25), (0, 2, 3, 11, 14, 17, 19, 21)),
        "orbit engine, light effort, 0.05 s",
    ),
    (31, 4, 2): Recipe(
        Group((Factor(31),), 1, 0, (15,)),
        ((1, 4, 27, 30),),
        "orbit engine, light effort, 0.02 s",
    ),
    (31, 5, 2): Recipe(
        Group((Factor(31),), 1, 0, (7,)),
        ((1, 2, 4, 8, 16),),
        "orbit engine, light effort, 0.01 s",
    ),
    (31, 10, 3): Recipe(
        Group((Factor(7),), 4, 3, (2,), (3,)),
        (
            (0, 1, 2, 3, 4, 5, 6, 28, 29, 30),
            (0, 1, 7, 9, 14, 18, 22, 23, 25, 28),
            (0, 3, 7, 13, 14, 19, 24, 26, 27, 29),
            (3, 4, 8, 13, 16, 19, 22, 23, 25, 30),
            (1, 3, 5, 9, 10, 13, 18, 19, 20, 21),
        ),
        "orbit engine, medium effort, 0.74 s",
    ),
    (33, 3, 1): Recipe(
        Group((Factor(33),), 1, 0, (7,)),
        ((0, 1, 10), (8, 19, 30)),
        "orbit engine, light effort, 0.15 s",
    ),
    (35, 5, 2): Recipe(
        Group((Factor(35),), 1, 0, (6,)),
        ((3, 10, 17, 24, 31), (3, 10, 17, 24, 31), (0, 1, 2, 6, 12), (0, 8, 13, 17, 32), (0, 9, 17, 19, 32)),
        "orbit engine, light effort, 0.08 s",
    ),
    (35, 7, 3): Recipe(
        Group((Factor(7),), 5, 0, (3,), (3,)),
        (
            (0, 1, 6, 17, 18, 21, 28),
            (28, 29, 30, 31, 32, 33, 34),
            (0, 7, 14, 21, 29, 30, 32),
            (2, 8, 18, 24, 26, 27, 28),
            (0, 3, 4, 7, 22, 27, 28),
            (1, 3, 11, 12, 16, 20, 28),
        ),
        "orbit engine, medium effort, 2.25 s",
    ),
    (35, 17, 8): Recipe(
        Group((Factor(35),), 1, 0, (4,)),
        ((0, 1, 3, 4, 7, 9, 11, 12, 13, 14, 16, 17, 21, 27, 28, 29, 33),),
        "orbit engine, 3000 steps, 0.05 s",
    ),
    (36, 6, 2): Recipe(
        Group((Factor(35),), 1, 1, (6,)),
        ((3, 10, 17, 24, 31, 35), (3, 10, 17, 24, 31, 35), (1, 2, 3, 6, 12, 18), (1, 6, 9, 17, 19, 32)),
        "orbit engine, light effort, 0.02 s",
    ),
    (36, 8, 4): Recipe(
        Group(
            (
                Factor(2),
                Factor(9, True),
            ),
            2,
            0,
            (
                1,
                2,
            ),
            (2,),
        ),
        ((1, 2, 12, 15, 28, 29, 31, 35), (3, 7, 8, 13, 14, 15, 21, 33), (3, 6, 12, 15, 19, 20, 28, 29)),
        "orbit engine, medium effort, 0.8 s",
    ),
    (36, 15, 6): Recipe(
        Group(
            (
                Factor(4),
                Factor(9, True),
            ),
            1,
            0,
            (
                1,
                4,
            ),
        ),
        ((0, 1, 2, 9, 12, 15, 18, 22, 26, 28, 29, 30, 31, 33, 35),),
        "orbit engine, 20000 steps, 0.1 s",
    ),
    (36, 15, 8): Recipe(
        Group(
            (
                Factor(4),
                Factor(9, True),
            ),
            1,
            0,
            (
                3,
                0,
            ),
        ),
        (
            (0, 1, 2, 3, 4, 5, 9, 10, 11, 24, 25, 26, 27, 28, 29),
            (0, 1, 3, 4, 6, 7, 9, 12, 15, 20, 23, 26, 27, 30, 33),
            (0, 1, 4, 5, 6, 8, 9, 13, 17, 20, 21, 25, 27, 31, 35),
            (0, 1, 3, 5, 7, 8, 9, 14, 16, 20, 22, 24, 27, 32, 34),
        ),
        "orbit engine, light effort, 0.05 s",
    ),
    (37, 3, 1): Recipe(
        Group((Factor(37),), 1, 0, (10,)),
        ((3, 4, 30), (6, 8, 23), (9, 12, 16), (0, 5, 14)),
        "orbit engine, light effort, 0.09 s",
    ),
    (37, 4, 1): Recipe(
        Group((Factor(37),), 1, 0, (10,)),
        ((0, 1, 3, 24),),
        "orbit engine, light effort, 0.01 s",
    ),
    (37, 9, 2): Recipe(
        Group((Factor(37),), 1, 0, (10,)),
        ((1, 7, 9, 10, 12, 16, 26, 33, 34),),
        "orbit engine, light effort, 0.01 s",
    ),
    (37, 10, 5): Recipe(
        Group((Factor(37),), 1, 0, (10,)),
        ((0, 1, 2, 6, 8, 10, 15, 20, 23, 26), (0, 1, 3, 4, 5, 10, 13, 19, 26, 30)),
        "orbit engine, light effort, 0.01 s",
    ),
    (39, 3, 1): Recipe(
        Group((Factor(19),), 2, 1, (4,)),
        ((0, 19, 38), (1, 7, 11), (0, 20, 21)),
        "orbit engine, light effort, 0.09 s",
    ),
    (41, 5, 1): Recipe(
        Group((Factor(41),), 1, 0, (10,)),
        ((2, 20, 32, 33, 36), (1, 10, 16, 18, 37)),
        "orbit engine, light effort, 0.01 s",
    ),
    (43, 7, 2): Recipe(
        Group((Factor(7),), 6, 1, (6,), (5,)),
        (
            (0, 7, 14, 21, 28, 35, 42),
            (0, 7, 14, 21, 28, 35, 42),
            (35, 36, 37, 38, 39, 40, 41),
            (35, 36, 37, 38, 39, 40, 41),
            (1, 6, 9, 12, 17, 18, 35),
            (1, 6, 16, 19, 31, 32, 35),
        ),
        "orbit engine, light effort, 0.01 s",
    ),
    (45, 5, 1): Recipe(
        Group(
            (
                Factor(5),
                Factor(9, True),
            ),
            1,
            0,
            (
                1,
                2,
            ),
        ),
        ((0, 10, 11, 39, 42), (0, 9, 18, 27, 36)),
        "orbit engine, light effort, 0.01 s",
    ),
    (45, 12, 3): Recipe(
        Group(
            (
                Factor(5),
                Factor(9, True),
            ),
            1,
            0,
            (
                4,
                2,
            ),
        ),
        ((9, 10, 11, 18, 21, 24, 27, 32, 34, 36, 40, 44),),
        "orbit engine, 200000 steps, 0.02 s",
    ),
    (45, 12, 4): Recipe(
        Group(
            (
                Factor(5),
                Factor(9, True),
            ),
            1,
            0,
            (
                1,
                0,
            ),
        ),
        (
            (0, 1, 2, 9, 10, 11, 21, 22, 23, 39, 40, 41),
            (0, 3, 6, 9, 12, 15, 19, 22, 25, 37, 40, 43),
            (0, 4, 8, 9, 13, 17, 19, 23, 24, 37, 41, 42),
            (0, 5, 7, 9, 14, 16, 19, 21, 26, 37, 39, 44),
        ),
        "orbit engine, light effort, 0.64 s",
    ),
    (46, 6, 2): Recipe(
        Group((Factor(9, True),), 5, 1, (1,), (4,)),
        (
            (1, 2, 22, 26, 36, 45),
            (0, 13, 17, 18, 28, 29),
            (0, 14, 16, 18, 30, 33),
            (0, 9, 32, 34, 40, 44),
            (3, 6, 31, 35, 40, 44),
            (9, 10, 11, 18, 19, 20),
        ),
        "orbit engine, light effort, 0.64 s",
    ),
    (49, 4, 1): Recipe(
        Group((Factor(49),), 1, 0, (18,)),
        ((0, 1, 3, 15), (0, 6, 10, 33)),
        "orbit engine, light effort, 0.02 s",
    ),
    (51, 6, 2): Recipe(
        Group((Factor(25, True),), 2, 1, (26,)),
        (
            (0, 5, 10, 15, 20, 50),
            (0, 5, 10, 15, 20, 50),
            (25, 32, 39, 41, 48, 50),
            (25, 32, 39, 41, 48, 50),
            (0, 1, 4, 25, 31, 49),
            (8, 22, 31, 36, 44, 49),
            (1, 4, 8, 22, 36, 44),
        ),
        "orbit engine, light effort, 0.05 s",
    ),
    (52, 4, 1): Recipe(
        Group(
            (
                Factor(4, True),
                Factor(13),
            ),
            1,
            0,
            (
                0,
                3,
            ),
        ),
        ((0, 13, 26, 39), (0, 1, 3, 9), (0, 14, 29, 48)),
        "orbit engine, light effort, 0.07 s",
    ),
    (56, 11, 2): Recipe(
        Group((Factor(7),), 8, 0, (2,), (6,)),
        (
            (0, 7, 14, 21, 28, 35, 42, 43, 44, 46, 49),
            (1, 9, 18, 22, 30, 39, 42, 49, 52, 54, 55),
            (0, 1, 4, 7, 9, 24, 26, 40, 41, 45, 53),
        ),
        "orbit engine, 300000 steps, 6.19 s",
    ),
    (61, 4, 1): Recipe(
        Group((Factor(61),), 1, 0, (9,)),
        ((0, 1, 5, 11),),
        "orbit engine, light effort, 0.03 s",
    ),
    (61, 5, 1): Recipe(
        Group((Factor(61),), 1, 0, (12,)),
        ((1, 9, 20, 34, 58),),
        "orbit engine, light effort, 0.05 s",
    ),
    (65, 5, 1): Recipe(
        Group((Factor(13),), 5, 0, (2,), (2, 2)),
        ((0, 13, 26, 39, 52), (1, 12, 18, 21, 52), (2, 11, 26, 42, 49), (0, 27, 38, 57, 60)),
        "orbit engine, light effort, 0.03 s",
    ),
    (66, 6, 1): Recipe(
        Group((Factor(13),), 5, 1, (3,), (3,)),
        (
            (0, 13, 26, 39, 52, 65),
            (40, 42, 48, 59, 60, 63),
            (0, 5, 24, 27, 59, 61),
            (0, 1, 11, 18, 41, 45),
            (0, 6, 21, 22, 42, 64),
        ),
        "orbit engine, 300000 steps, 15.82 s",
    ),
    (76, 6, 1): Recipe(
        Group((Factor(19),), 4, 0, (7,), (3,)),
        (
            (0, 19, 38, 59, 60, 71),
            (4, 28, 44, 67, 70, 72),
            (0, 5, 32, 46, 61, 70),
            (7, 8, 30, 37, 39, 50),
            (1, 12, 26, 27, 49, 56),
            (0, 2, 6, 9, 37, 64),
        ),
        "orbit engine, 60000000 steps, 313.78 s",
    ),
    (79, 13, 2): Recipe(
        Group((Factor(11),), 7, 2, (2,), (5,), (2,)),
        (
            (55, 56, 57, 58, 59, 60, 61, 62, 63, 64, 65, 77, 78),
            (66, 67, 68, 69, 70, 71, 72, 73, 74, 75, 76, 77, 78),
            (4, 5, 12, 14, 27, 31, 34, 37, 47, 53, 55, 66, 77),
            (0, 25, 27, 28, 30, 38, 39, 46, 53, 57, 64, 69, 74),
        ),
        "orbit engine, 300000 steps, 0.35 s",
    ),
    (81, 5, 1): Recipe(
        Group((Factor(81, True),), 1, 0, (16,)),
        ((3, 19, 69, 71, 75), (4, 37, 43, 56, 64), (5, 12, 58, 62, 76), (1, 23, 25, 51, 59)),
        "orbit engine, 30000 steps, 0.1 s",
    ),
    (91, 6, 1): Recipe(
        Group((Factor(91),), 1, 0, (30,)),
        ((0, 4, 13, 58, 72, 74),),
        "orbit engine, light effort, 0.11 s",
    ),
    (91, 7, 1): Recipe(
        Group((Factor(13),), 7, 0, (2,), (3, 3)),
        (
            (0, 13, 26, 39, 52, 65, 78),
            (2, 11, 19, 20, 31, 34, 78),
            (0, 15, 24, 44, 47, 58, 59),
            (4, 9, 53, 64, 65, 81, 88),
        ),
        "orbit engine, light effort, 0.09 s",
    ),
    (96, 6, 1): Recipe(
        Group((Factor(19),), 5, 1, (4,), (3,)),
        ((0, 19, 38, 57, 76, 95), (1, 7, 11, 81, 92, 93), (0, 35, 39, 61, 68, 79), (2, 3, 14, 39, 45, 49)),
        "orbit engine, medium effort, 0.47 s",
    ),
    (96, 20, 4): Recipe(
        Group(
            (
                Factor(2),
                Factor(3),
                Factor(16, True),
            ),
            1,
            0,
            (
                1,
                1,
                5,
            ),
        ),
        ((0, 1, 10, 11, 16, 18, 29, 31, 32, 35, 36, 39, 48, 53, 57, 60, 64, 70, 72, 78),),
        "orbit engine, 100000 steps, 1.97 s",
    ),
}
"""(t, k, λ) to the recipe."""

"""Right-to-left scripts on a printer that knows only glyphs from left to right.

`joined` gives Arabic letters the shapes that they take beside each other; `visual` puts a line into
the order in which it is drawn. Both read Unicode's own tables from the standard library.
"""

from __future__ import annotations

import re
import unicodedata
from functools import cache
from itertools import groupby

ISOLATE, END_ISOLATE = "\u2068", "\u2069"
ISOLATED = re.compile(f"({ISOLATE}[^{END_ISOLATE}]*(?:{END_ISOLATE}|$))")
MARKS = {ord(ISOLATE): None, ord(END_ISOLATE): None}
MIRRORED = str.maketrans("()[]{}<>«»‹›", ")(][}{><»«›‹")
LETTER_SHAPES = ((0xFB50, 0xFBB1), (0xFBD3, 0xFBE9), (0xFBFC, 0xFBFF), (0xFE80, 0xFEFC))
"""Code points of the shapes of single letters, and (the last eight) of lam with alef."""
RIGHT = frozenset({"R", "AL", "AN"})


def reads_right_to_left(text: str) -> bool:
    """Whether any letter of the text belongs to a right-to-left script."""
    return any(unicodedata.bidirectional(c) in RIGHT for c in text)


def joined(text: str) -> str:
    """The text with Arabic letters in their initial, medial, final and isolated shapes."""
    shapes, ligatures = _arabic_shapes()
    for pair, ligature in ligatures.items():
        text = text.replace(pair, ligature)
    solid = [i for i, c in enumerate(text) if not unicodedata.combining(c)]
    drawn = list(text)
    for at, i in enumerate(solid):
        own = shapes.get(text[i], {})
        before = shapes.get(text[solid[at - 1]], {}) if at else {}
        after = shapes.get(text[solid[at + 1]], {}) if at + 1 < len(solid) else {}
        left = "initial" in own and "final" in after
        right = "final" in own and "initial" in before
        shape = {(True, True): "medial", (True, False): "initial", (False, True): "final"}
        drawn[i] = own.get(shape.get((left, right), "isolated"), text[i])
    return "".join(drawn)


@cache
def _arabic_shapes() -> tuple[dict[str, dict[str, str]], dict[str, str]]:
    """Shapes of each letter by their Unicode name, and the ligatures of lam and alef.

    A ligature stands under its own isolated character, as a letter that joins to the right alone.
    """
    shapes: dict[str, dict[str, str]] = {}
    ligatures: dict[str, str] = {}
    for first, last in LETTER_SHAPES:
        for drawn in map(chr, range(first, last + 1)):
            shape, *letters = unicodedata.decomposition(drawn).split()
            _file_shape(drawn, shape.strip("<>"), letters, shapes, ligatures)
    return shapes, ligatures


def _file_shape(
    drawn: str,
    shape: str,
    codes: list[str],
    shapes: dict[str, dict[str, str]],
    ligatures: dict[str, str],
) -> None:
    letters = "".join(chr(int(code, 16)) for code in codes)
    if len(letters) == 1:
        shapes.setdefault(letters, {})[shape] = drawn
    elif shape == "isolated":
        ligatures[letters] = drawn
        shapes[drawn] = {"isolated": drawn, "final": chr(ord(drawn) + 1)}


def isolated(text: str) -> str:
    """Text that keeps its own direction inside a sentence of the other."""
    return f"{ISOLATE}{text}{END_ISOLATE}" if reads_right_to_left(text) else text


def visual(line: str) -> str:
    """One line in the order in which its glyphs are drawn, from left to right.

    The Unicode bidirectional algorithm (annex 9) for a line whose only direction marks are isolates.
    """
    if not reads_right_to_left(line):
        return line.translate(MARKS)
    pieces, kinds = _pieces(line)
    levels = _levels(kinds)
    order = list(range(len(pieces)))
    for level in range(max(levels), 0, -1):
        reordered: list[int] = []
        for high, run in groupby(order, key=lambda i: levels[i] >= level):
            stretch = list(run)
            reordered += stretch[::-1] if high else stretch
        order = reordered
    return _marks_after_letters([_mirrored(pieces[i]) if levels[i] % 2 else pieces[i] for i in order])


def _pieces(line: str) -> tuple[list[str], list[str]]:
    """Letters with their directions; what is isolated is one piece without a direction, ready drawn."""
    pieces: list[str] = []
    kinds: list[str] = []
    for part in ISOLATED.split(line):
        if part.startswith(ISOLATE):
            pieces.append(visual(part.translate(MARKS)))
            kinds.append("ON")
        else:
            letters = part.translate(MARKS)
            pieces += letters
            kinds += [unicodedata.bidirectional(c) or "ON" for c in letters]
    return pieces, kinds


def _mirrored(piece: str) -> str:
    """A bracket opens to the other side where reading does."""
    return piece.translate(MIRRORED) if len(piece) == 1 else piece


def _marks_after_letters(drawn: list[str]) -> str:
    """Reversing puts accents before their letters; a font draws them over the glyph before."""
    text, marks = "", ""
    for piece in drawn:
        if len(piece) == 1 and unicodedata.combining(piece):
            marks += piece
        else:
            text, marks = text + piece + marks, ""
    return text + marks


def _levels(kinds: list[str]) -> list[int]:
    strong = [kind for kind in kinds if kind in ("L", "R", "AL")]
    base = int(bool(strong) and strong[0] != "L")
    _resolve_numbers(kinds, "R" if base else "L")
    _resolve_neutrals(kinds, "R" if base else "L")
    rise = {"L": base % 2, "R": 1 - base % 2, "EN": 2 - base % 2, "AN": 2 - base % 2}
    return [base + rise[kind] for kind in kinds]


def _resolve_numbers(kinds: list[str], base: str) -> None:
    """Rules W1 to W7: accents follow their letters, numbers their surroundings."""
    before = strong = base
    for i, kind in enumerate(kinds):
        kinds[i] = before if kind == "NSM" else "AN" if kind == "EN" and strong == "AL" else kind
        before = kinds[i]
        strong = before if before in ("L", "R", "AL") else strong
    kinds[:] = ["R" if kind == "AL" else kind for kind in kinds]
    for i in range(1, len(kinds) - 1):
        around = {kinds[i - 1], kinds[i + 1]}
        if (kinds[i] == "CS" and around in ({"EN"}, {"AN"})) or (kinds[i] == "ES" and around == {"EN"}):
            kinds[i] = kinds[i - 1]
    for start, end in _runs(kinds, {"ET"}):
        if "EN" in (*kinds[max(0, start - 1) : start], *kinds[end : end + 1]):
            kinds[start:end] = ["EN"] * (end - start)
    strong = base
    for i, kind in enumerate(kinds):
        strong = kind if kind in ("L", "R") else strong
        if kind == "EN" and strong == "L":
            kinds[i] = "L"


def _resolve_neutrals(kinds: list[str], base: str) -> None:
    """Rules N1 and N2: what stands between two of one direction takes it, the rest the line's."""
    sides = {"L": "L", "R": "R", "EN": "R", "AN": "R"}
    for start, end in _runs(kinds, set(kinds) - sides.keys()):
        before = sides[kinds[start - 1]] if start else base
        after = sides[kinds[end]] if end < len(kinds) else base
        kinds[start:end] = [before if before == after else base] * (end - start)


def _runs(kinds: list[str], wanted: set[str]) -> list[tuple[int, int]]:
    """Start and end of each stretch of wanted kinds."""
    runs, at = [], 0
    for inside, run in groupby(kinds, key=wanted.__contains__):
        length = len(list(run))
        if inside:
            runs.append((at, at + length))
        at += length
    return runs

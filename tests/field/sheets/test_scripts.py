"""Right-to-left text in drawing order, against lines ordered by hand."""

from __future__ import annotations

from hypothesis import given
from hypothesis import strategies as st

from search.field.sheets.scripts import isolated, joined, visual


def test_left_to_right_text_stays() -> None:
    """Latin text with figures and brackets is drawn as it is read."""
    assert visual("Low Moor (north), 12 plots") == "Low Moor (north), 12 plots"


def test_hebrew_runs_to_the_left_and_figures_to_the_right() -> None:
    """Letters are turned round, the figures in them are not; brackets open to the other side."""
    assert visual("אבג") == "גבא"
    assert visual("אבג 123") == "123 גבא"
    assert visual("אב (ג)") == "(ג) בא"
    assert visual("אב 1.5 ק") == "ק 1.5 בא"


def test_a_hebrew_word_in_a_latin_line() -> None:
    """Only the word is turned round."""
    assert visual("Moor אבג west") == "Moor גבא west"


def test_an_isolated_name_does_not_turn_the_sentence() -> None:
    """Without isolation the figure would join the name; with it the sentence keeps its order."""
    assert visual(f"{isolated('אבג')}, 10 plots") == "גבא, 10 plots"
    assert visual(f"{isolated('אב')} (A), {isolated('גד')} (B): plots 1") == "בא (A), דג (B): plots 1"
    assert isolated("Arlen") == "Arlen"
    assert visual("\u2068אבג") == "גבא"


def test_arabic_letters_join() -> None:
    """Unicode's own names for the shapes: initial seen, final lam-alef, isolated meem."""
    assert joined("سلام") == "\ufeb3\ufefc\ufee1"
    assert joined("قمح") == "\ufed7\ufee4\ufea2"
    assert joined("دار") == "\ufea9\ufe8d\ufead"
    assert joined("م") == "\ufee1"
    assert joined("Arlen 12") == "Arlen 12"


def test_accents_do_not_part_letters_and_follow_them() -> None:
    """A vowel mark between two letters lets them join, and is drawn after its own letter."""
    assert joined("بَب") == "\ufe91\u064e\ufe90"
    assert visual("\ufe91\u064e\ufe90") == "\ufe90\ufe91\u064e"


@given(st.text(st.sampled_from("ab12 .,-()אבגقمح٣$%\u064e"), max_size=20))
def test_ordering_loses_nothing(line: str) -> None:
    """Whatever is mixed, every letter is drawn once (brackets may turn)."""
    turned = str.maketrans(")", "(")
    assert sorted(visual(line).translate(turned)) == sorted(line.translate(turned))

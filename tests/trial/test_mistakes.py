"""Every mistake gets an answer that helps: one file for each, its words, its line, and its mending.

The files are invented. What a message must hold (the line, the key, the word that mends it) was written down
from the design of the trial file, not from what the reader says.
"""

from __future__ import annotations

from pathlib import Path
from typing import NamedTuple

import pytest

from search.foundation.errors import FaultyTrial
from search.trial.nodes import parse_nodes
from search.trial.reading import read_trial, trial_from_nodes

DATA = Path(__file__).parents[1] / "data"
WHOLE = """\
trial: Mill Lane
treatments: [Arlen, Bracken, Clover, Dunlin]
blocks: {count: 4, plots: 3}
"""
BOMB = (DATA / "aliases_that_explode.yaml").read_text(encoding="utf-8")


class Mistake(NamedTuple):
    """What is wrong with one file.

    Parameters
    ----------
    line : where the fault must be found; 0 for a fault of the whole file
    words : what the message must hold
    old, new : the least change that mends the file
    """

    line: int
    words: tuple[str, ...]
    old: str
    new: str


MISTAKES = {
    "unknown_key": Mistake(
        5,
        (
            'the key "ruels"',
            'did you mean "rules"',
        ),
        "ruels",
        "rules",
    ),
    "unknown_rule": Mistake(6, ('did you mean "never_share_block"',), "blocks: [[", "block: [["),
    "unknown_setting_of_a_treatment": Mistake(4, ('the key "colour"',), "colour: red", "control: true"),
    "unknown_aim": Mistake(5, ('did you mean "all pairs"',), "pears", "pairs"),
    "aim_in_the_plural": Mistake(5, ('did you mean "worst pair"',), "pairs", "pair"),
    "aim_in_capitals": Mistake(5, ('did you mean "all pairs"',), "All Pairs", "all pairs"),
    "unknown_paper": Mistake(
        5,
        (
            '"A5"',
            "one of: A4, letter",
        ),
        "A5",
        "A4",
    ),
    "reps": Mistake(5, ("plots_each: the number of plots for each treatment",), "reps", "plots_each"),
    "replicates_at_the_top": Mistake(
        5,
        ("plots_each for a number of plots, rules.replicates for groups of blocks",),
        "replicates",
        "plots_each",
    ),
    "number_under_replicates": Mistake(
        6,
        (
            "names with lists of blocks",
            "plots_each says how many plots",
        ),
        "replicates: 3",
        "replicates: {}",
    ),
    "number_under_a_replicate": Mistake(6, ("a list [in, brackets]",), "{whole: 3}", "{whole: [north]}"),
    "reps_of_a_treatment": Mistake(4, ("try: plots",), "reps", "plots"),
    "rule_at_the_top": Mistake(
        5,
        ("set it in under rules:",),
        "never_share_block: [[Arlen, Clover]]",
        "rules: {never_share_block: [[Arlen, Clover]]}",
    ),
    "varieties": Mistake(
        3,
        (
            'the key "varieties"',
            "try: treatments",
        ),
        "varieties",
        "treatments",
    ),
    "keep_out_turned_round": Mistake(
        6,
        (
            '"north" is a block',
            "turned round",
        ),
        "north: [Arlen]",
        "Arlen: [north]",
    ),
    "must_hold_turned_round": Mistake(
        6,
        (
            '"Arlen" is a treatment',
            "turned round",
        ),
        "Arlen: [north]",
        "north: [Arlen]",
    ),
    "every_block_kept_out": Mistake(6, ("the name of a block",), "every block", "north"),
    "block_ratio_of_nothing": Mistake(5, ("from 1/1000 to 1000", "leave the key out"), "0.0001", "0.01"),
    "decimal_comma": Mistake(5, ("a decimal point: 8.1",), '"8,1"', "8.1"),
    "decimal_comma_in_braces": Mistake(5, ('the key "1"',), "8,1", "8.1"),
    "per_cent": Mistake(5, ("the number alone: 9",), "9%", "9"),
    "unit_behind_a_number": Mistake(5, ("the number alone, without a unit: 20",), "20 s", "20"),
    "number_in_quotes": Mistake(5, ("the number without its quotes: 3",), '"3"', "3"),
    "range_with_a_dash": Mistake(5, ("[3, 4]",), "3-4", "[3, 4]"),
    "range_turned_round": Mistake(
        5,
        (
            "the smaller number first",
            "[3, 4]",
        ),
        "[4, 3]",
        "[3, 3]",
    ),
    "range_of_three": Mistake(
        5,
        (
            "a list of 3",
            "a list of 2",
        ),
        "[3, 4, 5]",
        "[3, 5]",
    ),
    "range_of_a_treatment_turned_round": Mistake(4, ("[2, 4]",), "[4, 2]", "[2, 4]"),
    "half_a_plot": Mistake(
        5,
        (
            '"3.5"',
            "a whole number",
        ),
        "3.5",
        "3.0",
    ),
    "no_plot": Mistake(5, ("a whole number from 1",), "plots_each: 0", "plots_each: 1"),
    "thousands_set_apart": Mistake(5, ("the digits together: 1000000",), "1 000 000", "1000000"),
    "level_of_nought": Mistake(5, ("a number from 0.01 to 50",), "level_percent: 0", "level_percent: 0.01"),
    "power_of_a_hundred": Mistake(5, ("to 99.99",), "100", "99.99"),
    "power_below_the_level": Mistake(
        5, ("a power above the level",), "power_percent: 10", "power_percent: 10.1"
    ),
    "number_with_a_nought_before_it": Mistake(5, ("the number without noughts before it: 10",), "010", "10"),
    "date_for_a_number": Mistake(5, ("this is a date",), "2027-03-02", "8.1"),
    "time_for_a_number": Mistake(5, ("this is a time",), "3:20", "200"),
    "yes_for_true": Mistake(
        5,
        (
            "true or false",
            "true, without quotes",
        ),
        "yes",
        "true",
    ),
    "truth_in_quotes": Mistake(5, ("true, without quotes",), '"true"', "true"),
    "negative_seed": Mistake(
        5,
        (
            "found -1",
            "from 0",
        ),
        "-1",
        "0",
    ),
    "billion_treatments": Mistake(3, ("a whole number from 2 to 5,000",), "1000000000", "4"),
    "one_treatment": Mistake(3, ("a whole number from 2",), "treatments: 1", "treatments: 2"),
    "billion_plots": Mistake(
        4,
        (
            "500,000,000 plots",
            "at most 100,000",
        ),
        "plots: 100000",
        "plots: 20",
    ),
    "too_many_cells": Mistake(
        3, ("1,800 treatments in 1,400 blocks",), "treatments: 1800", "treatments: 1700"
    ),
    "treatment_twice": Mistake(6, ('"Arlen" beside "Arlen"',), "Bracken\n  - Arlen", "Bracken\n  - Clover"),
    "treatment_key_twice": Mistake(
        7,
        (
            '"Arlen" a second time',
            "the first stands in line 4",
        ),
        "Arlen: {plots: 4}",
        "Elder: {plots: 4}",
    ),
    "twin_names_but_for_case": Mistake(3, ("differ in more than case and blanks",), "ARLEN", "ARLEN 2"),
    "twin_names_but_for_blanks": Mistake(3, ('"LowMoor" beside "Low Moor"',), "LowMoor", "Low Moor B"),
    "twin_names_but_for_composing": Mistake(
        3, ("differ in more than case and blanks",), "Rose\u0301", "Rose"
    ),
    "unknown_treatment_in_a_rule": Mistake(6, ('did you mean "Clover"',), "Clovver", "Clover"),
    "unknown_block_in_a_rule": Mistake(6, ('did you mean "north"',), "[nort]", "[north]"),
    "name_in_another_case": Mistake(6, ('"Arlen", letter for letter',), "arlen", "Arlen"),
    "name_twice_in_a_rule": Mistake(6, ('"Arlen" a second time',), "[[Arlen, Arlen]]", "[[Arlen, Clover]]"),
    "blocks_with_twin_names": Mistake(6, ('"North" beside "north"',), "North", "North 2"),
    "name_without_letters": Mistake(
        3,
        (
            'found ""',
            "a text",
        ),
        '""',
        '"-"',
    ),
    "name_that_is_null": Mistake(
        3,
        (
            "found nothing",
            "put it in quotes if it really is called so",
        ),
        "null",
        '"null"',
    ),
    "name_too_long": Mistake(
        3,
        (
            "201 characters",
            "at most 200",
        ),
        "x" * 201,
        "x" * 200,
    ),
    "name_with_direction_mark": Mistake(3, ("U+202E right-to-left override",), "\u202e", "\u200c"),
    "name_with_hidden_blank": Mistake(3, ("U+200B zero width space",), "\u200b", " "),
    "name_on_two_lines": Mistake(3, ("a text in one line",), "\\n", " "),
    "list_without_brackets": Mistake(
        6,
        (
            "a list [in, brackets]",
            "brackets round it: [block 1]",
        ),
        ": block 1}",
        ": [block 1]}",
    ),
    "pair_without_second_brackets": Mistake(
        6,
        (
            "a list of lists",
            "[[Arlen, Clover]]",
        ),
        "[Arlen, Clover]\n",
        "[[Arlen, Clover]]\n",
    ),
    "blocks_with_dashes": Mistake(
        5,
        (
            "`name: value`",
            "without dashes",
        ),
        "- north: 3\n  - south",
        "north: 3\n  south",
    ),
    "group_of_one": Mistake(
        6,
        (
            "a list of 1",
            "2 or more",
        ),
        "[[Arlen]]",
        "[[Arlen, Clover]]",
    ),
    "pair_of_three": Mistake(
        6,
        (
            "a list of 3",
            "a list of 2",
        ),
        "[Arlen, Bracken, Clover], b",
        "[Arlen, Bracken], b",
    ),
    "meeting_without_blocks": Mistake(6, ("the key blocks",), "Bracken]}", "Bracken], blocks: 1}"),
    "pair_named_twice": Mistake(
        8,
        (
            "this pair a second time",
            "line 7",
        ),
        "[Bracken, Arlen]",
        "[Bracken, Clover]",
    ),
    "amount_without_unit": Mistake(4, ("the key unit",), "0.4}", "0.4, unit: kg}"),
    "empty_section": Mistake(
        5,
        (
            "found nothing",
            "leave the key out",
        ),
        "rules:\n",
        "rules: {}\n",
    ),
    "key_twice": Mistake(
        6,
        (
            "the key a second time",
            "line 5",
        ),
        "aim: overall\n",
        "",
    ),
    "block_of_no_size": Mistake(
        6,
        (
            "blocks.south",
            "found nothing",
        ),
        "south: \n",
        "south: 3\n",
    ),
    "count_without_plots": Mistake(4, ("the key plots",), "count: 4", "count: 4, plots: 3"),
    "no_treatments": Mistake(2, ("the key treatments",), "blocks", "treatments: 4\nblocks"),
    "no_name": Mistake(2, ("the key trial",), "treatments:", "trial: Mill Lane\ntreatments:"),
    "no_blocks": Mistake(2, ("blocks or ground",), "Dunlin]\n", "Dunlin]\nblocks: {count: 4, plots: 3}\n"),
    "not_a_trial": Mistake(
        2,
        (
            "a list of 2",
            "keys with values",
        ),
        "- Arlen\n- Bracken\n",
        WHOLE,
    ),
    "times_without_replicates": Mistake(
        6, ("rules.replicates beside it",), "per_replicate: {Arlen: 2}", "twice_in_block: true"
    ),
    "replicates_overlap": Mistake(8, ('in "one" already',), "two: [south, west]", "two: [east, west]"),
    "control_without_control": Mistake(
        5,
        (
            "control: true",
            "mark the control",
        ),
        "[Arlen, Bracken, Clover, Dunlin]",
        "{Arlen: {control: true}, Bracken: , Clover: , Dunlin: }",
    ),
    "contrast_that_is_none": Mistake(
        7,
        (
            "sum to 2",
            "site mean",
        ),
        "Clover: 1",
        "Clover: -1",
    ),
    "contrast_of_nothing": Mistake(7, ("not all 0",), "Arlen: 0, Clover: 0", "Arlen: 2, Clover: -2"),
    "contrast_with_rounded_thirds": Mistake(7, ("sum to 1/1000",), "-0.333", "-1/3"),
    "weight_of_nought": Mistake(7, ("a number above 0",), "weight: 0", "weight: 1/1000"),
    "map_with_ragged_lines": Mistake(
        6,
        (
            "lines of one length",
            "fill the line up with dots",
        ),
        "aaabbb\n",
        "aaabbb.\n",
    ),
    "map_with_digits": Mistake(
        6,
        (
            '"1" in line 1 of the map',
            "letters a-z",
        ),
        "111",
        "bbb",
    ),
    "map_of_dots": Mistake(6, ("0 plots",), "...", "aaa"),
    "map_name_of_no_letter": Mistake(7, ("a letter that is on the map",), "{c: bay c}", "{b: bay c}"),
    "map_with_twin_names": Mistake(7, ("a name of its own for every block",), "b: Bay", "b: bay 2"),
    "map_with_capitals_of_one_letter": Mistake(
        5, ("use only small letters, or name the blocks",), "AAA", "bbb"
    ),
    "ground_without_map": Mistake(4, ("ground.rows",), "{plot_m: [1.5, 9]}", "{plot_m: [1.5, 9], rows: aaa}"),
    "blocks_unlike_the_map": Mistake(5, ("blocks unlike those on the map",), "b: 3", "b: 2"),
    "latitude_last": Mistake(
        4,
        (
            "the latitude 101.5",
            "latitude first",
        ),
        "[101.5, 2.5]",
        "[2.5, 101.5]",
    ),
    "plot_without_length": Mistake(
        4,
        (
            "a list of 1",
            "a list of 2",
        ),
        "[1.5]",
        "[1.5, 9]",
    ),
    "plot_of_no_width": Mistake(4, ("a number above 0",), "[0, 9]", "[0.1, 9]"),
    "tab": Mistake(
        5,
        (
            "a tab",
            "blanks",
        ),
        "\tnorth",
        "  north",
    ),
    "no_blank_after_a_colon": Mistake(
        5,
        (
            '"aim:overall"',
            "a blank after the colon",
        ),
        "aim:overall",
        "aim: overall",
    ),
    "second_colon": Mistake(
        6,
        (
            "a second colon",
            "in quotes",
        ),
        "see page: four",
        '"see page: four"',
    ),
    "planted_plot_unknown": Mistake(
        6,
        ("a plot of this trial: 101 to 403", "the nearest is 103: line 1, place 3"),
        "104: Arlen",
        "103: Arlen",
    ),
    "planted_plot_without_number": Mistake(
        6, ("the number alone, such as  101: name",), "north: Arlen", "101: Arlen"
    ),
    "planted_treatment_unknown": Mistake(6, ('did you mean "Arlen"',), "Arlene", "Arlen"),
    "planted_plot_twice": Mistake(
        6, ("plot 101 a second time", "the first stands in line 6"), '"0101"', "102"
    ),
    "planted_at_three_sites": Mistake(6, ("3 sites to plan", "randomise.sites"), "sites: 3", "sites: 1"),
    "planted_before_bays_are_cut": Mistake(
        6, ("a rule about single blocks", "cut the bays first"), "rules:\n  planted: {101: Arlen}\n", ""
    ),
    "at_most_unlike_the_map": Mistake(
        4, ("blocks unlike those on the map", "{at_most: its plots}"), "at_most: 2", "at_most: 3"
    ),
    "at_most_misspelt": Mistake(6, ('the key "up_to"', "at_most"), "up_to", "at_most"),
    "at_most_of_nothing": Mistake(6, ("1",), "at_most: 0", "at_most: 3"),
    "bracket_left_open": Mistake(3, ("a bracket that is not closed",), "Clover\n", "Clover]\n"),
    "quote_left_open": Mistake(5, ("a quote that is not closed",), "Moor}", 'Moor"}'),
    "line_set_in_too_far": Mistake(6, ("a line set in too far or too little",), "   north", "  north"),
    "name_with_an_at_sign": Mistake(
        3,
        (
            "begins with @",
            'quotes: "@…"',
        ),
        "@home",
        '"@home"',
    ),
    "name_with_a_star": Mistake(3, ("the alias *best",), "*best", '"*best"'),
    "tag": Mistake(4, ("without tags",), "!!python/object/apply:os.system ", ""),
    "alias_of_itself": Mistake(5, ("the alias *all",), "*all", "all"),
    "merge_key": Mistake(5, ("the merge key <<",), "<<: *usual", "plots: 3"),
    "merge_key_among_names": Mistake(6, ("the merge key <<",), "<<: *usual\n  ", ""),
    "second_document": Mistake(5, ("a second document",), "---\n" + WHOLE, ""),
    "only_comments": Mistake(
        0, ("an empty file",), "# An invented trial with one mistake: nothing but comments.\n", WHOLE
    ),
    "aliases_that_explode": Mistake(7, ("aliases (&, *) unfolded",), BOMB, WHOLE),
}


def text_of(name: str) -> str:
    """The text of a file of the collection."""
    return (DATA / f"{name}.yaml").read_text(encoding="utf-8")


def test_every_file_has_its_row() -> None:
    """The collection and the table name the same mistakes, sixty or more."""
    assert {path.stem for path in DATA.glob("*.yaml")} == set(MISTAKES)
    assert len(MISTAKES) >= 60


@pytest.mark.parametrize("name", MISTAKES)
def test_a_mistake_is_told_in_five_parts(name: str) -> None:
    """One fault, at its line, with what was found, what must hold, why it matters and what to try."""
    mistake = MISTAKES[name]
    with pytest.raises(FaultyTrial) as caught:
        read_trial(DATA / f"{name}.yaml")
    (fault,) = caught.value.faults
    assert fault.line == mistake.line
    assert (fault.column > 0) == (mistake.line > 0)
    assert fault.file.endswith(f"{name}.yaml")
    assert all((fault.found, fault.must, fault.why, fault.remedy))
    for words in mistake.words:
        assert words in str(fault)


@pytest.mark.parametrize("name", MISTAKES)
def test_its_mending_is_accepted(name: str) -> None:
    """The nearest file without the mistake is a trial: the fault is no stricter than it says."""
    mistake = MISTAKES[name]
    text = text_of(name)
    assert mistake.old in text
    trial_from_nodes(parse_nodes(text.replace(mistake.old, mistake.new), name), name)


def test_all_faults_of_a_file_are_told_at_once() -> None:
    """Five mistakes in one file are five faults, in the order of the file."""
    text = "trial: x\ntreatments: [A, a]\nblocks: {count: 3, plots: none}\naim: nothing\nreps: 3\nruels: {}\n"
    with pytest.raises(FaultyTrial) as caught:
        trial_from_nodes(parse_nodes(text, "field.yaml"), "field.yaml")
    assert [fault.line for fault in caught.value.faults] == [2, 3, 4, 5, 6]

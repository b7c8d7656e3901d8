"""packet.xlsx: the plots with columns to fill in, the bag list, the map as coloured cells, the key."""

from __future__ import annotations

import io
from datetime import date, datetime
from typing import TYPE_CHECKING, Any

from search.field.crew import CrewPacket
from search.field.sheets.palette import INK, PANEL, QUIET, WARNING, WHITE, hex_of
from search.field.sheets.tints import block_tints
from search.field.tables import named

if TYPE_CHECKING:
    from xlsxwriter import Workbook
    from xlsxwriter.format import Format
    from xlsxwriter.worksheet import Worksheet

DATA = ("state", "sown_on", "measure_1", "measure_2", "measure_3", "remarks")
"""Columns to fill in; an analysis reads them beside the plot number and the mark of the plan."""
STATES = ("as planned", "lost", "doubtful")
SAFE = {"strings_to_formulas": False, "strings_to_urls": False, "strings_to_numbers": False}
"""A name that looks like a formula, a link or a number stays a name."""
MADE = datetime(2000, 1, 1)
"""Stands for the moment of writing, so that the same packet gives the same bytes."""
PAPER = {"A4": 9, "letter": 1}
LARGEST = 1e9
IN_SOIL = " \N{BLACK SQUARE}"
"""Behind the number of a plot that is planted already."""
LINE = 15.0
"""Points that a line of text takes."""


def packet_xlsx(packet: CrewPacket) -> bytes:
    """The workbook of a packet; the same packet gives the same bytes."""
    import xlsxwriter

    stream = io.BytesIO()
    book = xlsxwriter.Workbook(stream, {"in_memory": True, **SAFE})
    book.set_properties({"title": f"{packet.title}, {packet.mark}", "author": "", "created": MADE})
    book.set_calc_mode("manual")
    styles = _Styles(book)
    _plots(_sheet(book, "Plots", packet), packet, styles)
    if not packet.blind:
        _bags(_sheet(book, "Bags", packet), packet, styles)
    _map(_sheet(book, "Map", packet), packet, book, styles)
    _key(_sheet(book, "Key", packet), packet, styles)
    book.close()
    return stream.getvalue()


class _Styles:
    """The few formats that every sheet shares."""

    def __init__(self, book: Workbook) -> None:
        ink = {
            "font_name": "Calibri",
            "font_size": 11,
            "font_color": hex_of(INK),
            "valign": "top",
            "align": "left",
        }
        head = {**ink, "bold": True, "bg_color": hex_of(PANEL), "bottom": 1, "text_wrap": True}
        self.head = book.add_format(head)
        self.fill_in = book.add_format({**head, "font_color": "#1d5b4f"})
        self.plain = book.add_format(ink)
        self.bold = book.add_format({**ink, "bold": True})
        self.warning = book.add_format({**ink, "font_color": hex_of(WARNING), "text_wrap": True})
        self.line = book.add_format({**ink, "font_color": hex_of(WARNING)})
        self.open = book.add_format({**ink, "locked": False, "bottom": 4})
        self.day = book.add_format({**ink, "locked": False, "bottom": 4, "num_format": "yyyy-mm-dd"})


def _sheet(book: Workbook, name: str, packet: CrewPacket) -> Worksheet:
    sheet = book.add_worksheet(name)
    sheet.set_paper(PAPER[packet.paper])
    sheet.set_landscape()
    sheet.fit_to_pages(1, 0)
    title = packet.title[:80].replace("&", "&&")
    sheet.set_footer(f"&L{packet.mark}   {title}&Rissued {packet.issued}   page &P of &N")
    return sheet


def _head(sheet: Worksheet, names: list[str], styles: _Styles, widths: list[float]) -> None:
    for column, (name, wide) in enumerate(zip(names, widths, strict=True)):
        sheet.write_string(0, column, name, styles.fill_in if name in DATA else styles.head)
        sheet.set_column(column, column, wide)
    sheet.freeze_panes(1, 1)
    sheet.repeat_rows(0)


def _plots(sheet: Worksheet, packet: CrewPacket, styles: _Styles) -> None:
    resolvable = any(block.replicate for block in packet.blocks)
    fixed = [("plot", 7.0), ("block", 16.0), ("replicate", 12.0), ("line", 6.0), ("place", 6.0)]
    fixed += [("treatment", 24.0), ("code", 8.0), ("caution", 32.0), ("mark", 8.0)]
    fixed = [column for column in fixed if resolvable or column[0] != "replicate"]
    if any(packet.note(planted) for planted in packet.plots):
        fixed.append(("note", 15.0))
    names = [name for name, _ in fixed] + list(DATA)
    _head(sheet, names, styles, [wide for _, wide in fixed] + [12.0] * (len(DATA) - 1) + [32.0])
    for row, planted in enumerate(packet.plots, start=1):
        place, block = planted.place, packet.blocks[planted.place.block]
        treatment = packet.held(planted)
        values: dict[str, Any] = {
            "plot": place.plot,
            "block": block.name,
            "replicate": block.replicate,
            "line": place.line,
            "place": place.place,
            "treatment": named(packet, planted),
            "code": treatment.code,
            "caution": treatment.caution,
            "mark": packet.mark,
            "note": packet.note(planted),
        }
        _make_room(sheet, row, treatment.caution, 32)
        for column, name in enumerate(names):
            if name in values:
                style = styles.warning if name == "caution" else styles.plain
                _write(sheet, row, column, values[name], style)
            else:
                sheet.write_blank(row, column, None, styles.day if name == "sown_on" else styles.open)
    last = len(packet.plots)
    sheet.autofilter(0, 0, last, len(names) - 1)
    _validate(sheet, names, last)


def _validate(sheet: Worksheet, names: list[str], last: int) -> None:
    """What may be typed into the columns to fill in."""
    rules: dict[str, dict[str, Any]] = {
        "state": {
            "validate": "list",
            "source": list(STATES),
            "error_message": "One of: " + ", ".join(STATES),
        },
        "sown_on": {
            "validate": "date",
            "criteria": "between",
            "minimum": date(2000, 1, 1),
            "maximum": date(2199, 12, 31),
            "error_message": "A date, such as 2027-03-14",
        },
    }
    number = {
        "validate": "decimal",
        "criteria": "between",
        "minimum": -LARGEST,
        "maximum": LARGEST,
        "error_message": "A number alone: no unit, no text. Leave it empty where nothing was measured.",
    }
    for column, name in enumerate(names):
        rule = rules.get(name, number if name.startswith("measure") else None)
        if rule is not None:
            sheet.data_validation(1, column, last, column, {"ignore_blank": True, **rule})


def _bags(sheet: Worksheet, packet: CrewPacket, styles: _Styles) -> None:
    names = ["code", "treatment", "bags", "spare", "in a bag", "to weigh out", "caution"]
    _head(sheet, names, styles, [8, 28, 8, 8, 14, 14, 48])
    for row, entry in enumerate(packet.treatments, start=1):
        bags = entry.to_sow + packet.spare_bags
        _write(sheet, row, 0, entry.code, styles.bold)
        for column, value in enumerate((entry.name, bags, packet.spare_bags, entry.per_plot, entry.total), 1):
            _write(sheet, row, column, value, styles.plain)
        _write(sheet, row, 6, entry.caution, styles.warning)
        _make_room(sheet, row, entry.caution, 48)


def _key(sheet: Worksheet, packet: CrewPacket, styles: _Styles) -> None:
    names = ["code", "treatment", "plots", "caution"]
    _head(sheet, names, styles, [8, 32, 8, 64])
    for row, entry in enumerate(packet.treatments, start=1):
        _write(sheet, row, 0, entry.code, styles.bold)
        name = entry.name + (", control" if entry.control else "") if entry.name else "sealed"
        _write(sheet, row, 1, name, styles.plain)
        _write(sheet, row, 2, entry.plots, styles.plain)
        _write(sheet, row, 3, entry.caution, styles.warning)
        _make_room(sheet, row, entry.caution, 64)
    row = len(packet.treatments) + 3
    for caution in (c for c in packet.cautions if not c.about):
        _write(sheet, row, 0, f"{caution.title}: {caution.text}", styles.line)
        row += 1
    for told in (f"mark {packet.mark}, issued {packet.issued}", *packet.standing):
        _write(sheet, row + 1, 0, told, styles.plain)
        row += 1


def _map(sheet: Worksheet, packet: CrewPacket, book: Workbook, styles: _Styles) -> None:
    """The map with the far side at the top; bold lines where a block ends."""
    tints = block_tints(packet)
    at = {(planted.place.row, planted.place.column): planted for planted in packet.plots}
    made: dict[tuple[Any, ...], Format] = {}
    rows, columns = packet.extent
    sheet.set_column(0, columns - 1, 7.5)
    for row in range(rows):
        sheet.set_row(row, 33)
    for (row, column), planted in at.items():
        block = planted.place.block
        beyond = [(row - 1, column), (row + 1, column), (row, column - 1), (row, column + 1)]
        edges = tuple(place not in at or at[place].place.block != block for place in beyond)
        filler = planted.treatment is None
        tint = WHITE if filler else tints[block]
        key = (tint, edges)
        if key not in made:
            sides = zip(("top", "bottom", "left", "right"), edges, strict=True)
            made[key] = book.add_format(
                {
                    "bg_color": hex_of(tint),
                    "font_color": hex_of(QUIET if filler else INK),
                    "font_size": 10,
                    "align": "center",
                    "valign": "vcenter",
                    "text_wrap": True,
                    **{side: 2 if edge else 4 for side, edge in sides},
                }
            )
        treatment = packet.held(planted)
        told = f"{planted.place.plot}{IN_SOIL if planted.in_soil else ''}\n{treatment.code}"
        told += " !" if treatment.caution else ""
        sheet.write_string(row, column, told, made[key])
    foot = f"Far side at the top. {packet.mark}, issued {packet.issued}. ! has a caution."
    foot += " White, fill: filler, no treatment." if packet.filler else ""
    foot += f"{IN_SOIL} planted already." if packet.in_soil else ""
    sheet.write_string(rows + 1, 0, foot, styles.plain)


def _make_room(sheet: Worksheet, row: int, caution: str, wide: int) -> None:
    """Make a row high enough that no word of a caution is hidden in a column so many letters wide."""
    lines = -(-len(caution) * 5 // (4 * wide))
    if lines > 1:
        sheet.set_row(row, LINE * lines)


def _write(sheet: Worksheet, row: int, column: int, value: object, style: Format) -> None:
    if isinstance(value, int):
        sheet.write_number(row, column, value, style)
    else:
        sheet.write_string(row, column, str(value), style)

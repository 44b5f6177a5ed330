"""How the pages look: one sober theme, named styles, nothing left at the library's default."""

from __future__ import annotations

from openpyxl.styles import Alignment, Border, Font, NamedStyle, PatternFill, Protection, Side

FACE = "Calibri"
INK, RULE, BAND = "FF1F2A36", "FFB8C2CC", "FFE9EEF3"
# Text colour, background, bold, size, wrapped, horizontal, underline rule.
_STYLES: dict[str, tuple[str, str | None, bool, float, bool, str, bool]] = {
    "title": (INK, None, True, 15, False, "left", False),
    "subtitle": ("FF0B3C6F", None, True, 11.5, False, "left", False),
    "heading": (INK, BAND, True, 9.5, True, "left", True),
    "heading right": (INK, BAND, True, 9.5, True, "right", True),
    "label": (INK, None, False, 9.5, False, "left", False),
    "text": (INK, None, False, 9.5, True, "left", False),
    "line": (INK, None, False, 9.5, False, "left", False),
    "value": (INK, None, False, 9.5, False, "right", False),
    "input": ("FF0B3C6F", "FFF7F4E9", False, 9.5, False, "right", False),
    "entry": (INK, "FFFFF6C9", False, 10.5, False, "right", True),
    "entry text": (INK, "FFFFF6C9", False, 10.5, True, "left", True),
    "result": (INK, "FFDDE8F3", True, 10, False, "right", False),
    "unit": ("FF5A6672", None, False, 9.5, False, "left", False),
    "note": ("FF5A6672", None, False, 9, False, "left", False),
    "remark": ("FF3A4550", None, False, 9.5, True, "left", False),
    "warning": ("FF7A4B00", "FFFDF1DA", False, 9.5, True, "left", False),
    "caution": ("FF5A6672", None, False, 8.5, True, "left", False),
    "source": ("FF5A6672", None, False, 8.5, True, "left", False),
    "faint": ("FF7A858F", None, False, 9, False, "right", False),
    "faint text": ("FF7A858F", None, False, 9, False, "left", False),
    "verbatim": (INK, None, False, 9, False, "left", False),
    "pass": ("FF1B5E3A", "FFE3F1E8", True, 9.5, False, "left", False),
    "fail": ("FF8C1C13", "FFFBE4E1", True, 9.5, True, "left", False),
    "attention": ("FF7A4B00", "FFFDF1DA", True, 9.5, True, "left", False),
}

# Rows of large text, in points: not every program heightens them by itself.
HEIGHTS = {"title": 24.0, "subtitle": 17.0}
# What a technician fills in: the only cells of a protected page that can be changed.
ENTRIES = frozenset({"entry", "entry text"})
WRAPPED = frozenset(name for name, row in _STYLES.items() if row[4])


def difference(name: str) -> tuple[Font, PatternFill]:
    """Return the font and fill of a style, for a look that comes and goes."""
    colour, fill, bold, *_ = _STYLES[name]
    return Font(color=colour, bold=bold), PatternFill(start_color=fill, end_color=fill, fill_type="solid")


def styles() -> dict[str, NamedStyle]:
    """Return the named styles of the workbook."""
    found: dict[str, NamedStyle] = {}
    for name, (colour, fill, bold, size, wrapped, side, ruled) in _STYLES.items():
        style = NamedStyle(name=f"traverse {name}")
        style.font = Font(name="Consolas" if name == "verbatim" else FACE, size=size, bold=bold, color=colour)
        style.alignment = Alignment(
            horizontal=side, vertical="top", wrap_text=wrapped,
            # Numbers keep off the words in the next column; words beside them start where units do.
            indent=1 if side == "right" or name in {"unit", "text", "faint text"} else 0,
        )
        if fill:
            style.fill = PatternFill("solid", fgColor=fill)
        if ruled:
            style.border = Border(bottom=Side(style="thin", color=RULE))
        if name in ENTRIES:
            style.protection = Protection(locked=False)
            side_line = Side(style="thin", color=RULE)
            style.border = Border(left=side_line, right=side_line, top=side_line, bottom=side_line)
        found[name] = style
    return found

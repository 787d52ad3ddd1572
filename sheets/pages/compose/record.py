"""The record sheet: what was found and left, with what, by whom."""

from __future__ import annotations

from sheets.pages.compose.faces import digits, window_text
from sheets.pages.compose.matter import Matter
from sheets.pages.document import Section, SheetKind, Table


def record(matter: Matter) -> Section:
    """Blank boxes for everything that is read or decided."""
    found, speaker, unit = matter.procedure.search.found(), matter.speaker, matter.figures.pressure_unit
    rows = tuple(
        (
            str(number),
            speaker.adjuster(id_),
            f"{speaker.target_digits(id_)} {unit}",
            window_text(matter, found[id_].gauge),
            digits(matter, found[id_].gauge, found[id_].gauge.never_exceed_bar),
            "",
            "",
            "",
        )
        for number, id_ in enumerate(matter.procedure.order.sequence, start=1)
    )
    instruments = tuple(
        (gauge, "", "", "", "")
        for gauge in dict.fromkeys(found[id_].gauge.gauge for id_ in matter.procedure.order.sequence)
    )
    return Section(
        kind=SheetKind.RECORD,
        bookmark=matter.text("record_title"),
        title=matter.text("record_title"),
        subject=matter.machine.tag,
        lines=(matter.text("record_line"),),
        banner=None,
        blocks=(
            Table(
                title=matter.text("record_settings"),
                head=(
                    "row",
                    "adjuster",
                    matter.text("target"),
                    matter.text("accept"),
                    matter.text("never_exceed"),
                    f"as found, {unit}",
                    f"as left, {unit}",
                    "oil, °C",
                ),
                rows=rows,
                shares=(0.05, 0.25, 0.11, 0.14, 0.11, 0.13, 0.13, 0.08),
                row_height_mm=11.0,
            ),
            Table(
                title=matter.text("record_instruments"),
                head=("gauge", "serial no.", "range and class", "certificate", "due"),
                rows=instruments,
                shares=(0.12, 0.25, 0.25, 0.22, 0.16),
                row_height_mm=9.0,
            ),
            Table(
                title=matter.text("record_people"),
                head=("name", "part in the job", "date", "from", "to"),
                rows=(),
                shares=(0.34, 0.30, 0.14, 0.11, 0.11),
                blank_rows=3,
                row_height_mm=9.0,
                signed=True,
            ),
            Table(
                title=matter.text("record_deviations"),
                head=("row", "what was different", "decided by", "date"),
                rows=(),
                shares=(0.08, 0.54, 0.24, 0.14),
                blank_rows=4,
                row_height_mm=10.0,
            ),
        ),
    )

"""A document as a composer would hand it over, for an invented machine, with what is awkward to set."""

from __future__ import annotations

from sheets.pages.document import (
    Act,
    Banner,
    Box,
    Document,
    Emphasis,
    GaugeFace,
    Heading,
    Hold,
    IssueContext,
    KeyLines,
    Paragraph,
    PowerState,
    Section,
    SettingPanel,
    SettingTag,
    SheetKind,
    Step,
    Steps,
    Table,
    TagSheet,
    Warning,
)

DIGEST = "7K4Q2M9DX1TB60RA"

LONG_NAME = (
    "Proportional pressure-compensated directional control valve block with load-holding, port relief, "
    "anti-cavitation and manual override functions for the transverse kiln-car pusher cylinder group of the "
    "second firing line, mounted below the service platform on the north wall beside the settling tank, "
    "bay 14"
)
MARKUP_NAME = "Valve <b>HV2</b> &amp; <i>drain</i> %s {x}"
GREEK_NAME = "Βαλβίδα ανακούφισης Ω3, Δp 25 bar"
CYRILLIC_NAME = "Клапан сброса К7"

BLANK = Box(label="", size="tick")
TIME = Box(label="time", size="short")
LOCK = Box(label="lock no.", size="short")
OWNER = Box(label="owner", size="medium", signed=True)
BY = Box(label="by", size="medium", signed=True)


def dial(**changes: object) -> GaugeFace:
    """Gauge G1 at the relief valve: 400 bar."""
    values: dict[str, object] = {
        "gauge": "G1",
        "caption": "G1 at test point TP1",
        "unit": "bar",
        "digital": False,
        "scale_end": 400.0,
        "graduation": 5.0,
        "target": 206.0,
        "window": (202.0, 210.0),
        "never_exceed": 225.0,
        "target_text": "206",
        "window_text": "202 to 210",
        "never_exceed_text": "225",
        "second_unit_text": "2988 psi (2930 to 3046)",
    }
    return GaugeFace(**{**values, **changes})  # type: ignore[arg-type]  # a test's shorthand: values are mixed


PSI = dial(
    unit="psi",
    scale_end=6000.0,
    graduation=100.0,
    target=2990.0,
    window=(2930.0, 3050.0),
    never_exceed=3260.0,
    target_text="2990",
    window_text="2930 to 3050",
    never_exceed_text="3260",
    second_unit_text="206 bar (202 to 210)",
)
LOW = dial(
    gauge="G2",
    caption="G2 at test point TP4",
    scale_end=60.0,
    graduation=1.0,
    target=24.0,
    window=(22.0, 26.0),
    never_exceed=40.0,
    target_text="24",
    window_text="22 to 26",
    never_exceed_text="40",
    second_unit_text="348 psi (319 to 377)",
)
DIGITAL = dial(
    gauge="G3",
    caption="G3, digital, at test point TP2",
    digital=True,
    scale_end=600.0,
    graduation=0.1,
    target=181.5,
    window=(179.0, 184.0),
    never_exceed=195.0,
    target_text="181.5",
    window_text="179.0 to 184.0",
    never_exceed_text="195.0",
)

INJECTION = Warning(
    signal="WARNING",
    hazard="Oil at up to 225 bar can go through skin.",
    lines=(
        "Keep hands off joints and hoses. Stand at the left of the manifold. Wear eye protection.",
        "A second person stays at the stop button E1 until step 12.",
    ),
)
FALL = Warning(
    signal="DANGER",
    hazard="The kiln-car lift, 3100 kg, can come down and crush you.",
    lines=("Keep out from under the lift until pin B1 is set. Stand at the side of the pit.",),
)
HOT = Warning(signal="CAUTION", hazard="Oil at 65 °C burns.", lines=("Wear gloves. Let the cap drip first.",))
NOTE = Warning(signal="NOTICE", hazard="The lock nut takes 22 N·m.", lines=("More strips the thread.",))

PANEL = SettingPanel(
    face=dial(),
    boxes=(
        Box(label="G1 as found", unit="bar"),
        Box(label="oil temperature", unit="°C"),
        Box(label="G1 as left", unit="bar", strong=True),
    ),
)


def steps_of_relief() -> tuple[Step, ...]:
    return (
        Step(
            number="7",
            order="Close hand valve HV2.",
            lines=("Else the pusher cylinder extends at 0.11 m/s.",),
            warnings=(INJECTION,),
        ),
        Step(
            number="8",
            order="Close vent valve HV4.",
            lines=("Else the pump stands at 24 bar and RV1 stays shut.",),
        ),
        Step(
            number="9",
            order="Start M1. Read G1 within 5 s.",
            lines=("G1 stays below 30 bar. If it rises above 40 bar, press E1.",),
        ),
        Step(
            number="10",
            order="Turn RV1 in by quarter turns.",
            lines=("Come up from below. G1 stays: put the screw back, see F3.",),
            warnings=(HOT,),
        ),
        Step(number="11", order="Hold the screw. Tighten the lock nut.", warnings=(NOTE,)),
        Step(
            number="12",
            order="Read G1. Write it down.",
            hold=Hold(
                word="HOLD",
                order="A second person reads G1 before the next page.",
                reason="A wrong reading here shows nowhere later.",
            ),
        ),
    )


COVER = Section(
    kind=SheetKind.COVER,
    bookmark="Cover",
    title="Setting procedure and lockout",
    subject="PU-07",
    lines=(
        "Kiln-car pusher, power unit, firing hall 2, Brackwater Tileworks",
        "Task: set after commissioning",
    ),
    banner=None,
    blocks=(
        Paragraph(
            text="Made from the machine file of 2026-11-20. Compared with the machine by ______ on ______.",
            weight="strong",
        ),
        Paragraph(
            text="The computer checked a model, not the machine. This paper is for this machine and task "
            "only. The maker's documents, the site's lockout programme and local law come first. For "
            "authorised, trained persons only."
        ),
        Emphasis(
            lead="Oil under the skin is an emergency without pain.",
            lines=("To hospital now. Say: injection, 225 bar, mineral oil HLP 46.",),
            right="Tel. 112",
        ),
        Emphasis(
            lead="Stops",
            lines=("E1 at the operator's desk. E2 on the north wall beside the pit.",),
            right="Shift lead 4417",
        ),
        Table(
            title="In this pack",
            head=("document", "pages", "where it is used"),
            shares=(0.4, 0.2, 0.4),
            rows=(
                ("Work instruction", "2 to 5", "at the machine"),
                ("Lockout sheet", "6", "at the machine"),
                ("Setting tags", "8", "on the adjusters"),
                ("Record sheet", "9", "in the folder"),
            ),
        ),
        Table(
            title="What the parts are called",
            head=("on the plate", "name", "place"),
            shares=(0.16, 0.56, 0.28),
            rows=(
                ("HV2", MARKUP_NAME, "pressure manifold, left face"),
                ("Ω3", GREEK_NAME, "test bench"),
                ("К7", CYRILLIC_NAME, "return line △ ☐ ⌀12"),
                ("DV1", LONG_NAME, "service platform"),
            ),
        ),
    ),
)

RELIEF = Section(
    kind=SheetKind.WORK_INSTRUCTION,
    bookmark="Set RV1",
    title="Set the relief valve",
    subject="RV1",
    lines=(
        "on the pressure manifold, left face, hex 6 mm, lock nut 17 mm (22 N·m) · clockwise raises",
        "Tools: hex 6, open spanner 17, gauge G1 400 bar class 1.0",
    ),
    banner=Banner(state=PowerState.POWERED, word="POWERED", left="Window 1 of 2", right="at most 20 min"),
    blocks=(
        Steps(steps=steps_of_relief(), panel=PANEL),
        KeyLines(
            rows=(
                (
                    "If it trips here",
                    "HV2 shut, pump off, 0 to 4 bar at G1 after 20 s. Go back in at step 8.",
                ),
                (
                    "If something reads wrong",
                    "F3 on page 9: four causes of “G1 stays at 24 bar”, nearest first.",
                ),
            )
        ),
    ),
)

LONG_RUN = Section(
    kind=SheetKind.WORK_INSTRUCTION,
    bookmark="Set the compensator",
    title="Set the compensator and the margin of the load-sensing control",
    subject="PU1",
    lines=("on the pump, upper adjuster, hex 5 mm, lock nut 13 mm · clockwise raises",),
    banner=Banner(state=PowerState.POWERED, word="POWERED", left="Window 2 of 2", right="at most 30 min"),
    blocks=(
        Steps(
            steps=tuple(
                Step(
                    number=str(number),
                    order=f"Turn PU1.compensator out by one quarter turn, pass {number - 12}.",
                    lines=("G3 falls by 6 to 9 bar a quarter turn. If it does not fall, stop and see F5.",),
                    boxes=(Box(label="G3", unit="bar", never_exceed="max 195 bar"),)
                    if number % 3 == 0
                    else (BLANK,),
                    warnings=(HOT,) if number in (16, 22) else (),
                )
                for number in range(13, 27)
            ),
            panel=SettingPanel(
                face=DIGITAL,
                boxes=(
                    Box(label="G3 as found", unit="bar"),
                    Box(label="G3 as left", unit="bar", strong=True),
                ),
                notes=("Hold 10 s before you read.",),
            ),
        ),
        Hold(
            word="HOLD", order="A second person reads G3.", reason="The margin is set against this reading."
        ),
        Heading(text="Then the margin", light="G2 shows it directly"),
        Steps(
            steps=(
                Step(
                    number="27",
                    order="Connect G2 between TP4 and TP5.",
                    lines=("Both caps off at zero only.",),
                ),
                Step(number="28", order="Turn PU1.margin in by eighth turns.", warnings=(FALL,)),
                Step(number="29", order="Read G2. Write it down."),
            ),
            panel=SettingPanel(
                face=LOW,
                boxes=(
                    Box(label="G2 as found", unit="bar"),
                    Box(label="G2 as left", unit="bar", strong=True),
                ),
            ),
        ),
        Heading(text="Hand over", level=2),
        Steps(
            steps=(
                Step(
                    number="30",
                    order="Open hand valve HV2 by one turn, wait 10 s, then open it fully.",
                    lines=("The pusher cylinder creeps by 4 mm.",),
                    boxes=(TIME, BY),
                ),
                Step(number="31", order=LONG_NAME, lines=(MARKUP_NAME, GREEK_NAME)),
            )
        ),
    ),
)

LOCKOUT = Section(
    kind=SheetKind.LOCKOUT,
    bookmark="Lock out PU-07",
    title="Lock out the power unit",
    subject="PU-07",
    lines=(
        "before gauges are fitted · basis: the site's lockout programme, section 4",
        "Affected people told at ________ by ________________",
    ),
    banner=Banner(state=PowerState.LOCKED, word="LOCKED"),
    blocks=(
        Paragraph(
            text="These are the declared sources. Look for others. If you find one, stop. Tell the planner.",
            weight="strong",
        ),
        Paragraph(
            text="Declared absent: accumulator, spring brake, pneumatic supply, second electrical supply. "
            "If you see one, stop."
        ),
        Act(
            number="1",
            name="Stop",
            rows=(
                Step(
                    number="",
                    order="Press stop on panel H1. Wait until M1 stands still.",
                    lines=("Coasts about 8 s.",),
                    boxes=(TIME,),
                ),
            ),
        ),
        Act(
            number="2",
            name="Isolate",
            rows=(
                Step(
                    number="",
                    order="Q7 main switch, door of panel H1: turn to OFF.",
                    lines=("400 V, 37 kW to motor M1. Lock through the handle.",),
                    boxes=(LOCK, OWNER),
                ),
                Step(
                    number="",
                    order="Q9 control supply, inside panel H1: turn to OFF.",
                    lines=("24 V to valves. Qualified person opens the panel.",),
                    boxes=(LOCK, OWNER),
                ),
            ),
        ),
        Act(
            number="3",
            name="Block",
            rows=(
                Step(
                    number="",
                    order="Set pin B1 under the kiln-car lift.",
                    warnings=(FALL,),
                    lines=("3100 kg, up to 0.6 m, 18 kJ. Lift rests on the pin before step 4.",),
                    boxes=(Box(label="seen by", size="medium", signed=True),),
                ),
            ),
        ),
        Act(
            number="4",
            name="Relieve",
            rows=(
                Step(
                    number="",
                    order="Open NV1 slowly. Lock it open.",
                    lines=("Relieves the pressure line: up to 185 bar.",),
                    boxes=(LOCK, OWNER),
                ),
                Step(
                    number="",
                    order="Lever valve DV1: move to both ends, three times.",
                    lines=(
                        "Lines A and B stay shut between DV1 and the closed hand valves.",
                        "Trapped, no designed relief: do not open these joints.",
                    ),
                    boxes=(Box(label="done", size="tick"),),
                ),
            ),
        ),
        Act(
            number="5",
            name="Verify",
            rows=(
                Step(
                    number="",
                    order="Attempt to start: panel H1, remote R2. Nothing starts.",
                    lines=("Stops reset and guards closed first. Then all controls back to off.",),
                    boxes=(TIME, BY),
                ),
                Step(
                    number="",
                    order="G1 showed 24 bar or more today. Now it reads 0.",
                    lines=("A gauge at 0 can hide up to 1.6 bar. Keep NV1 open.",),
                    boxes=(Box(label="G1", unit="bar"), TIME),
                ),
                Step(number="", order="24 V dead at terminal X4: tested by a qualified person.", boxes=(BY,)),
            ),
        ),
        Hold(
            word="HOLD",
            order="A second person checks 2 to 5 before any joint is opened.",
            reason="Pressure comes back if NV1 is shut: read G1 every 30 min.",
        ),
        Emphasis(
            lead="Oil under the skin is an emergency without pain.",
            lines=("To hospital now. Say: injection, 185 bar, oil.",),
            right="Tel. 112",
        ),
        Table(
            title="People and their locks",
            light="One lock a person. Put yours on before another comes off.",
            head=("name", "lock no.", "on: date, time", "off: date, time", "taken over by", "read G1 again"),
            shares=(0.24, 0.11, 0.18, 0.18, 0.17, 0.12),
            rows=(),
            blank_rows=6,
            signed=True,
        ),
    ),
)


def tag(adjuster: str, kind: str, face: GaugeFace, value: str, window: str, second: str) -> SettingTag:
    return SettingTag(
        id=adjuster,
        adjuster=adjuster,
        kind=kind,
        face=face,
        value=value,
        window=window,
        second_unit=second,
        basis=(
            "deadheaded, 98 L/min, oil 50 °C",
            "25 bar above the compensator",
            "clockwise raises · seal ________",
        ),
        as_left="as left ______ · date ____________ · by ______",
        next_check="next check 2028-03",
        footer="PU-07 · WI-0147 · setting record, not a lockout tag",
    )


TAGS = Section(
    kind=SheetKind.TAGS,
    bookmark="Setting tags",
    title="Setting tags",
    subject="PU-07",
    lines=("Print at 100 %, cut along the dashes.",),
    banner=None,
    blocks=(
        TagSheet(
            tags=(
                tag("RV1", "relief valve", dial(), "206 bar", "202 to 210", "(2988 psi)"),
                tag("RV2", "relief valve, psi dial", PSI, "2990 psi", "2930 to 3050", "(206 bar)"),
                tag(
                    "PU1.margin", "margin of the load-sensing control", LOW, "24 bar", "22 to 26", "(348 psi)"
                ),
                tag(
                    "PU1.compensator",
                    "pressure compensator",
                    DIGITAL,
                    "181.5 bar",
                    "179.0 to 184.0",
                    "(2632 psi)",
                ),
                tag("Ω3", GREEK_NAME, dial(), "206 bar", "202 to 210", "(2988 psi)"),
                tag(
                    "HV2",
                    MARKUP_NAME,
                    dial(target=200.0, window=(196.0, 204.0)),
                    "200 bar",
                    "196 to 204",
                    "(2901 psi)",
                ),
                tag("DV1", LONG_NAME, dial(scale_end=250.0), "206 bar", "202 to 210", "(2988 psi)"),
                tag(
                    "RD1",
                    "reducing valve",
                    dial(
                        scale_end=160.0, graduation=2.0, target=60.0, window=(58.0, 62.0), never_exceed=70.0
                    ),
                    "60 bar",
                    "58 to 62",
                    "(870 psi)",
                ),
                tag(
                    "SQ1",
                    "sequence valve",
                    dial(
                        scale_end=100.0, graduation=1.0, target=50.0, window=(48.0, 52.0), never_exceed=100.0
                    ),
                    "50 bar",
                    "48 to 52",
                    "(725 psi)",
                ),
                tag(
                    "CB1",
                    "counterbalance valve",
                    dial(scale_end=315.0, graduation=5.0),
                    "206 bar",
                    "202 to 210",
                    "(2988 psi)",
                ),
                tag("CB2", "counterbalance valve", dial(), "206 bar", "202 to 210", "(2988 psi)"),
            )
        ),
    ),
)

RECORD = Section(
    kind=SheetKind.RECORD,
    bookmark="Record",
    title="Readings as found and as left",
    subject="PU-07",
    lines=("One row a reading. Keep this sheet in the folder of the machine.",),
    banner=None,
    blocks=(
        Table(
            title="Readings",
            head=("adjuster", "gauge", "target", "accept", "as found", "as left", "by"),
            shares=(0.2, 0.1, 0.12, 0.18, 0.14, 0.14, 0.12),
            blank_rows=2,
            signed=True,
            row_height_mm=10,
            rows=(
                ("RV1", "G1", "206 bar", "202 to 210", "", "", ""),
                ("PU1.compensator", "G3", "181.5 bar", "179.0 to 184.0", "", "", ""),
                ("PU1.margin", "G2", "24 bar", "22 to 26", "", "", ""),
            ),
        ),
    ),
)

ENGINEER = Section(
    kind=SheetKind.ENGINEER,
    bookmark="Account of the trials",
    title="What was tried, and what was not",
    subject="PU-07",
    lines=(
        "Single slips and faults in a model. Two at once, worn parts, wrong data, transients: not tried.",
    ),
    banner=None,
    blocks=(
        Heading(text="Derivation of the targets"),
        *(
            Paragraph(
                text=f"{ordinal} paragraph. RV1 stands 25 bar above the compensator, since at 98 L/min its "
                "pressure rises by 6.3 bar from opening, the gauge reads to 1.0 % of 400 bar, and the "
                "compensator may stand 4 bar high. The limit is the rating of the hose H3, 225 bar at 65 °C."
            )
            for ordinal in ("First", "Second", "Third", "Fourth", "Fifth", "Sixth")
        ),
        Heading(text="Trials"),
        Table(
            title="Slips",
            light="each alone, to the end",
            head=("step", "slip", "what reads wrong", "grade"),
            shares=(0.1, 0.4, 0.35, 0.15),
            rows=tuple(
                (
                    str(7 + index % 24),
                    f"valve HV{index % 6 + 1} left as it was, trial {index}",
                    f"G1 stays at {20 + index} bar"
                    + (" and the pusher creeps by 4 mm a minute" * (index % 4 == 0)),
                    "shown" if index % 5 else "hold point",
                )
                for index in range(70)
            ),
        ),
        Heading(text="Not tried", level=2),
        Paragraph(text="Two slips at once. Worn parts. Wrong data. Transients.", weight="small"),
    ),
)

SAMPLE = Document(
    number="WI-0147",
    title="Kiln-car pusher PU-07 · Brackwater Tileworks",
    language="en",
    data_dated="2026-11-20",
    engine="1",
    sections=(COVER, RELIEF, LONG_RUN, LOCKOUT, TAGS, RECORD, ENGINEER),
    footer="Not valid unless checked current before this job: scan, or telephone the planner, 4417.",
)

ISSUE = IssueContext(
    record_id="7Q2M4KXT9B",
    record_address="https://records.brackwater.example/jamnut",
    revision="C",
    state="issued",
    date="2027-03-01",
    zone="UTC+01:00",
    signers=(("prepared", "R. Quillby"), ("checked", "T. Ashgrove"), ("approved", "M. Fennick")),
    changes=("RV1 raised from 200 to 206 bar: hose H3 replaced.", "Step 9 reads G1 within 5 s."),
    as_left=(("RV1", "as left 205 bar · 2027-03-04 · by R. Quillby"),),
)

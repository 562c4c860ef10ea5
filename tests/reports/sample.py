"""An invented results record with every verdict, as the reports would receive it."""

import math
from dataclasses import replace
from typing import Any

from edgeplan.caution import CAUTION
from edgeplan.results import (
    Assumption,
    BankChoice,
    BoardEmission,
    BoardLine,
    Candidate,
    CandidateResistor,
    CandidateSetting,
    Check,
    Choice,
    Condition,
    Conditions,
    Contributor,
    Corners,
    Cost,
    EmissionAtLine,
    EmissionPart,
    FillIn,
    Finding,
    Input,
    InputNote,
    LineNote,
    MechanismAtLine,
    Missing,
    ModelNote,
    NetResult,
    NotJudged,
    Pictures,
    Place,
    Remedy,
    Results,
    Spectrum,
    Spread,
    TargetSummary,
    Tool,
    Trace,
    ValueCount,
    WhatIf,
    Window,
    WindowEnd,
)

NS = 1e-9


def edge(fast: float | None, typical: float | None, slow: float | None) -> Corners:
    """Return an edge from nanoseconds."""
    values = [None if value is None else value * NS for value in (fast, typical, slow)]
    return Corners(fast=values[0], typical=values[1], slow=values[2])


def window(
    fast: float | str | None, slow: float | str | None, frequency_hz: float | None = None
) -> Window:
    """Return a window from nanoseconds, ``any``, a reason why none, or nothing."""
    return Window(
        fastest_acceptable=_end(fast, "emission", frequency_hz),
        slowest_allowed=_end(slow, "setup", None),
    )


def _end(value: float | str | None, cause: str, frequency_hz: float | None) -> WindowEnd:
    if value == "any":
        return WindowEnd(edge_s=0.0, any=True)
    if isinstance(value, str):
        return WindowEnd(edge_s=None, why_none=value, cause=cause, frequency_hz=frequency_hz)
    if value is None:
        return WindowEnd(edge_s=None)
    return WindowEnd(edge_s=value * NS, check=0, cause=cause, frequency_hz=frequency_hz)


def timing(check: str, candidate: int, value: float, limit: float, **more: Any) -> Check:
    """Return a timing check from nanoseconds; the value must stay below the limit."""
    margin = (limit - value) * NS
    return Check(
        check=check,
        candidate=candidate,
        condition=Condition(driver_pin="U1.K4", receiver_pin="U7.F2", corner="slow", edge="rising"),
        value=value * NS,
        limit=limit * NS,
        margin=margin,
        unit="s",
        margin_share=margin / (limit * NS),
        decided=True,
        wants="faster",
        error=Spread(low=-1e-12, high=1e-12),
        provenance=["datasheet"],
        **more,
    )


def emission(candidate: int, mhz: float, order: int, level: float, budget: float) -> Check:
    """Return an emission check with its two mechanisms."""
    return Check(
        check="emission",
        candidate=candidate,
        condition=Condition(corner="fast"),
        value=level,
        limit=budget,
        margin=round(budget - level, 6),
        unit="dB",
        margin_share=1 - 10 ** (-(budget - level) / 20),
        decided=True,
        wants="slower",
        error=Spread(low=-3.4, high=3.4),
        provenance=["datasheet", "assumed"],
        frequency_hz=mhz * 1e6,
        order=order,
        detector="quasi-peak",
        parts=[
            EmissionPart(
                mechanism="trace",
                model="trace",
                expected_dbuv_per_m=level - 9.0,
                up_to_dbuv_per_m=level - 7.2,
                error_db=Spread(low=-1.8, high=1.8),
            ),
            EmissionPart(
                mechanism="cable",
                model="cable",
                expected_dbuv_per_m=level - 0.6,
                up_to_dbuv_per_m=level + 4.9,
                error_db=Spread(low=-3.4, high=3.4),
            ),
        ],
    )


def at_line(state: Any, level: float, *what_if: WhatIf, **more: Any) -> EmissionAtLine:
    """Return the emission at 200 MHz, of which the cable makes 87 percent."""
    mechanisms = [
        MechanismAtLine(
            mechanism=name,
            expected_dbuv_per_m=level - below,
            up_to_dbuv_per_m=level - below + up_to,
            low_dbuv_per_m=level - below - error,
            high_dbuv_per_m=level - below + error,
            power_share=10 ** (-below / 10),
        )
        for name, below, up_to, error in (("trace", 9.0, 1.8, 1.8), ("cable", 0.6, 5.5, 3.4))
    ]
    return EmissionAtLine(
        state=state,
        frequency_hz=200e6,
        order=2,
        parity="even",
        detector="quasi-peak",
        driver_state="run",
        limit_dbuv_per_m=40.0,
        budget_dbuv_per_m=34.0,
        level_dbuv_per_m=level,
        low_dbuv_per_m=level - 3.4,
        high_dbuv_per_m=level + 3.4,
        mechanisms=mechanisms,
        what_if=list(what_if),
        **more,
    )


def what_if(kind: Any, text: str, level: float, change: float, **more: Any) -> WhatIf:
    """Return one change at 200 MHz, whose own line goes on binding unless said otherwise."""
    same = {"binds_hz": 200e6, "binds_order": 2, "binds_margin_db": 34.0 - level}
    return WhatIf(
        kind=kind,
        text=text,
        level_dbuv_per_m=level,
        change_db=change,
        under_budget=level <= 34.0,
        **same | more,
    )


def _emission_of_the_clock() -> list[EmissionAtLine]:
    """The memory clock as drawn, with a change of each kind, and after its proposal."""
    other = {"binds_hz": 900e6, "binds_order": 9, "binds_margin_db": -1.4}
    unknown = WhatIf(
        kind="setting",
        text="setting D1S (bank sdr)",
        level_dbuv_per_m=None,
        change_db=None,
        under_budget=None,
    )
    now = at_line(
        "now",
        41.3,
        what_if("proposal", "the proposal: setting D3F (bank sdr), fit 33 Ω at R17", 32.8, -8.5),
        what_if("resistor", "fit 10 Ω at R17 (was a link)", 39.9, -1.4),
        unknown,
        what_if("cable filter", "10 dB more on every cable", 34.0, -7.3, **other),
        what_if("inner layer", "the trace on L3", 22.0, -19.3, **other, assumption="same ends"),
        notes=["the trace alone is 2.1 dB over at 900 MHz"],
    )
    after = at_line(
        "after", 32.8, what_if("resistor", "setting D3F, fit 47 Ω at R17", 32.78, -0.02)
    )
    return [now, after]


def share(check: str, candidate: int, value: float, limit: float) -> Check:
    """Return a fidelity check in shares of the swing."""
    return Check(
        check=check,
        candidate=candidate,
        condition=Condition(
            driver_pin="U1.K4", receiver_pin="U7.F2", corner="fast", edge="falling"
        ),
        value=value,
        limit=limit,
        margin=limit - value,
        unit="",
        margin_share=(limit - value) / limit,
        decided=True,
        wants="slower",
        provenance=["datasheet"],
    )


def undecided(check: str, because: str) -> Check:
    """Return a check that waits for a value."""
    return Check(
        check=check,
        candidate=0,
        condition=Condition(corner="fast"),
        value=None,
        limit=34.0,
        margin=None,
        unit="dB",
        margin_share=None,
        decided=False,
        wants="slower",
        undecided_because=because,
    )


def candidate(
    number: int,
    drive: str,
    value_ohm: float | None,
    *,
    passes: bool,
    why: str = "",
    share: float | None = None,
    **cost: int,
) -> Candidate:
    """One candidate of a net with one driver and one site at most."""
    resistors = [] if value_ohm is None else [CandidateResistor(site="R17", value_ohm=value_ohm)]
    return Candidate(
        candidate=number,
        settings=[
            CandidateSetting(
                driver_pin="U1.K4",
                state="run",
                setting=drive,
                bank="sdr",
                source="data sheet, table 12",
            )
        ],
        resistors=resistors,
        passes=passes,
        rejected_by=[] if passes else [1],
        cost=Cost(**cost),
        smallest_share=share,
        why_rejected=why,
    )


def net(name: str, interface: str, timing_class: str, **fields: Any) -> NetResult:
    """One net; whatever is not stated is a net inside as drawn."""
    defaults: dict[str, Any] = {
        "aliases": [],
        "at": Place(file="nets.csv", row=2),
        "verdict": "inside",
        "verdict_after": "inside",
        "borderline": False,
        "borderline_after": False,
        "undecided_because": [],
        "edge_levels": "10-90",
        "edge_after_s": fields.get("edge_now_s", Corners()),
        "window_after": fields.get("window_now"),
        "candidate_now": 0,
        "proposal": 0,
        "change": "nothing",
        "proposal_text": "no change",
        "what_binds": "",
    }
    return NetResult(net=name, interface=interface, timing_class=timing_class, **defaults | fields)


def memory_clock(pictures: Pictures | None = None) -> NetResult:
    """Return the net that explain shows: mended by a value instead of a link."""
    return net(
        "SDR_CLK",
        "sdr",
        "clock",
        aliases=["SDR_CLK_R"],
        verdict="too fast",
        borderline_after=True,
        edge_now_s=edge(0.5, 0.7, 1.0),
        edge_after_s=edge(0.68, 0.97, 1.32),
        window_now=window(1.9, 2.1, 200e6),
        window_after=window(0.62, 2.0, 200e6),
        transition_now_s=0.9 * NS,
        transition_after_s=1.2 * NS,
        proposal=3,
        change="link to value",
        proposal_text="setting D3F (bank sdr), fit 33 Ω at R17 instead of the link",
        what_binds="emission at 200 MHz, overshoot",
        line=LineNote(
            impedance_ohm=51.7,
            delay_s=0.178 * NS,
            length_m=0.031,
            layer="L1",
            provenance="computed",
            text="microstrip 0.18 mm over L2, 0.11 mm away",
        ),
        inputs=[
            InputNote(name="clock", value="100 MHz", provenance="datasheet", source="nets.csv:2"),
            InputNote(
                name="edge of smc9_a D4F",
                value="0.50–0.70–1.00 ns, 10–90 %",
                provenance="datasheet",
                source="data sheet, table 12",
            ),
            InputNote(
                name="side distance", value="centred", provenance="assumed", source="no value given"
            ),
        ],
        candidates=[
            candidate(
                0,
                "D4F",
                0,
                passes=False,
                why="emission 7.3 dB over at 200 MHz; overshoot",
                share=-1.3,
            ),
            candidate(1, "D3F", 0, passes=False, why="emission 4.0 dB over", setting=1, share=-0.6),
            candidate(2, "D2S", 0, passes=False, why="input transition too long", setting=1),
            candidate(3, "D3F", 33, passes=True, share=0.13, setting=1, link_to_value=1),
        ],
        checks=[
            emission(0, 200.0, 2, 41.3, 34.0),
            share("overshoot", 0, 0.21, 0.15),
            timing("input transition", 0, 0.9, 2.4, limit_edge_s=2.1 * NS),
            emission(3, 200.0, 2, 32.8, 34.0),
            share("overshoot", 3, 0.06, 0.15),
            timing("input transition", 3, 1.2, 2.4, limit_edge_s=2.0 * NS),
        ],
        notes=["one receiver, no route given: straight line of 31 mm"],
        emission_at_line=_emission_of_the_clock() if pictures else [],
        pictures=pictures,
    )


def _memory_nets() -> list[NetResult]:
    return [
        memory_clock(),
        net(
            "SDR_A0",
            "sdr",
            "common-clock",
            verdict="too fast",
            borderline=True,
            edge_now_s=edge(0.5, 0.7, 1.0),
            edge_after_s=edge(0.9, 1.2, 1.6),
            window_now=window(0.82, 4.6, 300e6),
            window_after=window(0.71, 4.4, 300e6),
            proposal=1,
            change="setting",
            proposal_text="setting D3F (bank sdr)",
            what_binds="overshoot",
            checks=[share("overshoot", 0, 0.18, 0.15), share("overshoot", 1, 0.09, 0.15)],
        ),
        net(
            "SDR_DQ10",
            "sdr",
            "common-clock",
            verdict="too slow",
            edge_now_s=edge(2.6, 3.6, 4.9),
            edge_after_s=edge(0.9, 1.25, 1.7),
            window_now=window(0.5, 3.9, 300e6),
            window_after=window(0.66, 4.2, 300e6),
            transition_now_s=8.4 * NS,
            transition_after_s=2.7 * NS,
            proposal=2,
            change="setting",
            proposal_text="setting D3F (bank sdr), 33 Ω instead of 68 Ω at RN3",
            what_binds="setup",
            checks=[timing("setup", 0, 10.9, 9.9), timing("setup", 2, 8.15, 9.9)],
        ),
        net(
            "SDR_DQ2",
            "sdr",
            "common-clock",
            edge_now_s=edge(0.9, 1.2, 1.6),
            window_now=window("any", 4.5),
            what_binds="setup",
            checks=[timing("setup", 0, 8.1, 9.9)],
        ),
    ]


def _other_nets() -> list[NetResult]:
    needs = Missing(value="smallest edge", of="cm1 fixed", settles="inside from 2.15 ns")
    return [
        net(
            "CAM_PCLK",
            "cam",
            "clock",
            verdict="undecided",
            verdict_after="undecided",
            undecided_because=["smallest edge of cm1 fixed: a maximum is stated, 1.50 ns"],
            edge_now_s=edge(None, None, 1.5),
            window_now=window(None, 2.6),
            what_binds="smallest edge of cm1 fixed is missing",
            missing=[needs],
            checks=[
                undecided("emission", "smallest edge"),
                timing("input transition", 0, 1.9, 2.5),
            ],
        ),
        net(
            "CAM_D0",
            "cam",
            "source-synchronous",
            verdict="undecided",
            verdict_after="undecided",
            undecided_because=["smallest edge of cm1 fixed: a maximum is stated, 1.50 ns"],
            edge_now_s=edge(None, None, 1.5),
            window_now=window(None, 3.8),
            what_binds="smallest edge of cm1 fixed is missing",
            missing=[Missing(value="smallest edge", of="cm1 fixed", settles="inside from 0.40 ns")],
            checks=[timing("setup", 0, 3.9, 5.4)],
        ),
        net(
            "EXP_CLK",
            "exp",
            "clock",
            verdict="no window",
            verdict_after="no window",
            edge_now_s=edge(0.8, 1.1, 1.5),
            edge_after_s=edge(1.3, 1.8, 2.4),
            window_now=window("harmonics 1 and 3 over the budget at any edge", 1.6, 66e6),
            window_after=window("harmonic 1 over the budget at any edge", 1.5, 66e6),
            proposal=4,
            change="value",
            proposal_text="68 Ω instead of 33 Ω at R31 (least excess)",
            what_binds="emission at 66 MHz, out of reach; input transition",
            checks=[emission(0, 66.0, 1, 46.0, 34.0), emission(4, 66.0, 1, 40.2, 34.0)],
            remedies=[
                Remedy(remedy="shorter route", amount=0.073, unit="m", closes_db=2.2),
                Remedy(remedy="cable filter", amount=6.2, unit="dB", closes_db=6.2),
            ],
        ),
        net(
            "EXP_STB",
            "exp",
            "strobe",
            verdict="no window",
            edge_now_s=edge(2.6, 3.6, 4.9),
            edge_after_s=edge(1.7, 2.4, 3.2),
            window_now=window(3.1, 2.2, 165e6),
            window_after=window(1.4, 2.9, 165e6),
            proposal=2,
            change="new site",
            proposal_text="setting D2S, add a resistor of 33 Ω 2.5 mm from U1.T3",
            what_binds="plateau at J7.3 and emission at 165 MHz",
            checks=[timing("plateau", 0, 1.9, 1.0), timing("plateau", 2, 0.2, 1.0)],
        ),
        net(
            "REF50_PHY",
            "rmii",
            "clock",
            borderline=True,
            borderline_after=True,
            edge_now_s=edge(0.6, 0.8, 1.1),
            window_now=window(0.55, 3.4, 250e6),
            what_binds="emission at 250 MHz",
            checks=[emission(0, 250.0, 5, 40.6, 41.0)],
        ),
        net(
            "I2C_SCL",
            "i2c",
            "open-drain",
            verdict="too slow",
            edge_levels="30-70",
            edge_now_s=edge(8.0, 12.0, 20.0),
            window_now=window("any", 120.0),
            window_after=window("any", 120.0),
            transition_now_s=730 * NS,
            transition_after_s=285 * NS,
            proposal=1,
            change="value",
            proposal_text="pull-up of 1.8 kΩ instead of 4.7 kΩ",
            what_binds="rise time",
            checks=[timing("rise time", 0, 730, 300), timing("rise time", 1, 285, 300)],
        ),
        net(
            "SHEET_3/DISPLAY_PANEL/CONNECTOR/DISP_CLK_TO_PANEL",
            "disp",
            "clock",
            verdict="too fast",
            verdict_after="no window",
            edge_now_s=edge(0.5, 0.7, 1.0),
            window_now=window(2.4, 5.2, 165e6),
            what_binds="emission at 165 MHz",
            proposal_text="no change; needs a remedy (driver and site are fixed)",
            checks=[emission(0, 165.0, 5, 38.4, 34.0)],
            remedies=[Remedy(remedy="away from the side", amount=0.011, unit="m", closes_db=4.9)],
        ),
        net(
            "UART_TX",
            "uart",
            "asynchronous",
            edge_now_s=edge(0.8, 1.0, 1.4),
            window_now=window("any", "any"),
            what_binds="overshoot",
            checks=[share("overshoot", 0, 0.12, 0.35)],
        ),
    ]


def pictures() -> Pictures:
    """Waveforms of one pole with ringing, and a spectrum of 30 lines."""
    times = [0.05 * step * NS for step in range(200)]
    waves = [
        Trace(
            receiver_pin="U7.F2",
            corner=corner,
            edge="rising",
            state=state,
            time_s=times,
            volt=[3.3 * (1 - math.exp(-t / tau) * math.cos(t / (ring * NS))) for t in times],
        )
        for state, ring in (("now", 0.4), ("after", 1.2))
        for corner, tau in (("slow", 0.9 * NS), ("fast", 0.4 * NS))
    ]
    return Pictures(
        waveforms=waves,
        spectra=[_spectrum("now", 44.0), _spectrum("after", 35.5)],
        thresholds_v={"VIL": 0.8, "VIH": 2.0},
    )


def _spectrum(state: Any, start: float) -> Spectrum:
    orders = list(range(1, 11))
    level = [start - 0.4 * n - (6.0 if n % 2 == 0 else 0.0) for n in orders]
    return Spectrum(
        state=state,
        detector="quasi-peak",
        frequency_hz=[n * 100e6 for n in orders],
        order=orders,
        expected_dbuv_per_m=level,
        up_to_dbuv_per_m=[value + 5.0 for value in level],
        trace_dbuv_per_m=[value - 8.0 + n for n, value in zip(orders, level, strict=True)],
        cable_dbuv_per_m=[value - 0.7 for value in level],
        limit_dbuv_per_m=[40.0 if n < 3 else 47.0 for n in orders],
        corner_low_hz=64e6,
        corner_high_hz=450e6,
    )


RULES = {
    "too fast": "edge-too-fast",
    "too slow": "edge-too-slow",
    "no window": "window-closed",
    "undecided": "edge-undecided",
}
WAIVED = Finding(
    rule="edge-too-fast",
    net="DEBUG_CLK",
    message="emission 3.0 dB over",
    fingerprint="beef",
    waived="until 2027-03-31 by reviewer: port not fitted",
)


def _finding(entry: NetResult) -> Finding:
    """Return what a net that is not inside adds to the findings."""
    rule = RULES[entry.verdict_after]
    return Finding(
        rule=rule, net=entry.net, message=entry.what_binds, fingerprint=f"{rule} {entry.net}"
    )


def _board_line(mhz: float, level: float, budget: float, parts: dict[str, float]) -> BoardLine:
    return BoardLine(
        frequency_hz=mhz * 1e6,
        detector="quasi-peak",
        level_dbuv_per_m=level,
        budget_dbuv_per_m=budget,
        sum="amplitude",
        contributors=[Contributor(net=name, share=part) for name, part in parts.items()],
    )


def _count(nets: list[NetResult], field: str) -> dict[str, int]:
    words = ("inside", "too fast", "too slow", "no window", "undecided")
    found = [getattr(entry, field) for entry in nets]
    return {word: found.count(word) for word in words} | {"not judged": 4}


def record(command: str = "plan", nets: list[NetResult] | None = None) -> Results:
    """Return the whole record; explain gets one net with pictures."""
    nets = _memory_nets() + _other_nets() if nets is None else nets
    nets = [
        replace(entry, at=Place(file="nets.csv", row=row))
        for row, entry in enumerate(nets, start=2)
    ]
    unsettled = [entry for entry in nets if entry.verdict_after != "inside"]
    return Results(
        command=command,
        tool=Tool(version="0.1.0"),
        caution=CAUTION,
        board="HM-1 revision A",
        inputs=[
            Input(path="board.toml", sha256="00" * 32),
            Input(path="nets.csv", sha256="11" * 32),
        ],
        emission_target=TargetSummary(
            limits=["cispr32-class-b-3m", "cispr32-class-b-3m-above-1ghz"],
            margin_db=6.0,
            statistic="expected",
            highest_hz=1e9,
            highest_rule="highest internal frequency 100 MHz: to 1 GHz",
            verified=False,
            unverified=["cispr32-class-b-3m", "cispr32-class-b-3m-above-1ghz"],
        ),
        conditions=Conditions(corners=["slow", "typical", "fast"], states=["boot", "run"]),
        models=[
            ModelNote(
                model="cable",
                version=1,
                error_db=Spread(low=-3.4, high=3.4),
                source="full-wave runs",
            ),
            ModelNote(
                model="trace",
                version=1,
                error_db=Spread(low=-1.8, high=1.8),
                source="full-wave runs",
            ),
        ],
        assumptions=[
            Assumption(subject=name, text="centred on the board", provenance="assumed")
            for name in ("SDR_A0", "SDR_DQ2", "UART_TX")
        ]
        + [
            Assumption(
                subject="not used", text="accepted but not used yet: [[pair]]", provenance="assumed"
            ),
            Assumption(
                subject="not used",
                text="accepted but not used yet: deadline of exp",
                provenance="assumed",
            ),
            Assumption(
                subject="geometry",
                text="3 nets state no distance to the side and count as centred",
                provenance="assumed",
            ),
        ],
        nets=nets,
        not_judged=[
            NotJudged(net="USB_DN", reason="differential"),
            NotJudged(net="USB_DP", reason="differential"),
            NotJudged(net="+3V3", reason="power"),
            NotJudged(net="GND", reason="power"),
        ],
        board_emission=BoardEmission(
            lines=[
                _board_line(
                    200.0,
                    35.2,
                    34.0,
                    {"SDR_CLK": 0.71, "REF50_PHY": 0.2, "SDR_A0": 0.06, "X": 0.03},
                )
            ],
            lines_now=[_board_line(200.0, 43.9, 34.0, {"SDR_CLK": 0.83, "SDR_A0": 0.1})],
        ),
        choice=Choice(
            scope="board",
            status="proved",
            gap=0.0,
            values=[
                ValueCount(value_ohm=0.0, count=3, count_now=4),
                ValueCount(value_ohm=33.0, count=5, count_now=2),
                ValueCount(value_ohm=68.0, count=1, count_now=2),
            ],
            banks=[
                BankChoice(
                    bank="sdr",
                    setting_now="D4F",
                    setting="D3F",
                    members=["U1.K4", "U1.M1", "U1.M2"],
                    text="the only setting good for all seven nets",
                )
            ],
            arrays=[],
        ),
        findings=[*map(_finding, unsettled), WAIVED],
        totals=_count(nets, "verdict"),
        totals_after=_count(nets, "verdict_after"),
        fill_in=[FillIn(value="smallest edge", of="cm1 fixed", nets=["CAM_D0", "CAM_PCLK"])],
    )


def one_net() -> Results:
    """Return the record that explain gives."""
    return record("explain", [memory_clock(pictures())])


def checked() -> Results:
    """Return the record that check gives: every net as drawn."""
    nets = [
        replace(
            entry,
            verdict_after=entry.verdict,
            edge_after_s=entry.edge_now_s,
            window_after=entry.window_now,
            transition_after_s=entry.transition_now_s,
            proposal=entry.candidate_now,
            proposal_text="no change",
        )
        for entry in record().nets
    ]
    return record("check", nets)

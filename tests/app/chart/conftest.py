"""An invented episode, ward and map to draw."""

from zoneinfo import ZoneInfo

import numpy as np
import pytest

from app.chart.shapes import (
    Band,
    Bracket,
    Drawn,
    Lane,
    LaneItem,
    LaneKind,
    LanesSpec,
    Look,
    MapBand,
    MapGas,
    MapLine,
    MapSpec,
    PanelSpec,
    RibbonSpec,
    RibbonStep,
    Scale,
    Span,
    StackSpec,
    SupportPiece,
    Tick,
    Trace,
)
from app.look.theme import GasState, Tier, Verdict

MINUTE = 60_000_000
START = 1_774_640_000_000_000
ZONE = ZoneInfo("Europe/London")


def at(minutes):
    return START + round(minutes * MINUTE)


@pytest.fixture
def gas_panel():
    t = np.array([at(5), at(70), at(140), at(400)])
    looks = np.array([Look.FRESH, Look.DOUBTFUL, Look.CORRECTED, Look.CARRIED], np.uint8)
    return PanelSpec(
        "gas",
        "Blood gas",
        (
            Trace("ph", "pH", "pH", t, np.array([7.21, 7.25, 7.31, 7.36]), Drawn.SPOTS_JOINED, 2, looks=looks),
            Trace("paco2", "PaCO2", "mmHg", t, np.array([80.0, 74.0, 62.0, 55.0]), Drawn.SPOTS_JOINED),
        ),
        (Scale("pH", 7.1, 7.5, 2), Scale("mmHg", 40, 100)),
        bands=(Band(7.35, 7.45, "pH", "target"),),
        brackets=(
            Bracket(at(20), at(50), at(140), Verdict.BETTER, "better", GasState.ACIDOTIC, "acidotic"),
            Bracket(at(60), at(90), at(180), Verdict.WORSE, "worse"),
            Bracket(at(400), at(430), at(520), Verdict.NOT_YET_KNOWN, "not yet known", still_open=True),
        ),
    )


@pytest.fixture
def device_panel():
    t = START + np.arange(480) * MINUTE
    vte = 450 + 20 * np.sin(np.arange(480) / 9)
    vte[200:230] = np.nan
    return PanelSpec(
        "vol",
        "Tidal volume",
        (Trace("vte", "VTe", "mL", t, vte, gap=5 * MINUTE, doubts=(Span(at(100), at(130), "leak high"),)),),
        (Scale("mL", 200, 700),),
    )


@pytest.fixture
def stack_spec(gas_panel, device_panel):
    ribbon = RibbonSpec(
        "Pressure",
        "cmH2O",
        (
            RibbonStep(at(0), at(20), 5, None, "CPAP", "FiO2 ?", False),
            RibbonStep(at(20), at(200), 5, 15, "BPAP-ST", "FiO2 35 %"),
            RibbonStep(at(230), at(480), 6, 18, "BPAP-ST", "FiO2 28 %"),
        ),
        (Span(at(200), at(230), "break"),),
        (Tick(at(20), "15/5"), Tick(at(230), "18/6")),
    )
    return StackSpec(
        ZONE,
        START,
        at(480),
        (gas_panel, device_panel),
        ribbon,
        (Tick(at(60), "nebuliser"), Tick(at(61), "review")),
        now=at(480),
        now_word="now",
        name="Bed 3",
        summary="Bed 3 in words",
    )


@pytest.fixture
def lanes_spec():
    def lane(n, *items):
        pieces = (SupportPiece(at(10), at(480), 10.0), SupportPiece(at(0), at(10), None, "CPAP"))
        return Lane(f"e{n}", f"Bed {n}", "70 y", pieces, items, sentence=f"Bed {n} in words", due_word="gas due")

    gases = [
        LaneItem(LaneKind.GAS, at(m), f"gas at {m}", verdict=v, state=s)
        for m, v, s in (
            (30, None, GasState.SEVERE),
            (120, Verdict.WORSE, GasState.SEVERE),
            (300, Verdict.BETTER, GasState.RESOLVED),
        )
    ]
    first = lane(
        1,
        *gases,
        LaneItem(LaneKind.SETTING, at(60), "IPAP 16", word="16/6", payload=7),
        LaneItem(LaneKind.WINDOW, at(420), "gas due", end=at(510), word="gas due"),
        LaneItem(LaneKind.BREAK, at(200), "off the mask", end=at(240), word="break"),
        LaneItem(LaneKind.FLAG, at(120), "pH below 7.25", tier=Tier.ESCALATE),
    )
    others = tuple(lane(n) for n in range(2, 30))
    return LanesSpec(ZONE, at(-30), at(540), (first, *others), at(480), "now", name="The ward")


@pytest.fixture
def map_spec():
    paco2 = np.linspace(20, 110, 50)
    line = MapLine(paco2, 6.1 + np.log10(24 / (0.0307 * paco2)), "24 mmol/L")
    band = MapBand(paco2, line.ph - 0.03, line.ph + 0.03, "acute")
    gases = (
        MapGas(1, at(0), 7.21, 80, GasState.SEVERE, word="first"),
        MapGas(2, at(60), 7.30, 66, GasState.ACIDOTIC, Verdict.BETTER, "second"),
    )
    return MapSpec(
        Scale("mmHg", 20, 110), Scale("pH", 7.0, 7.6, 2), "PaCO2, mmHg", "pH", (line,), (band,), gases, name="map"
    )

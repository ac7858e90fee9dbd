"""The cautions: what they must say, and that no name can act in them.

60 V d.c. touchable in dry places: IEC 61140; IEC 60204-1, 6.4.  120 V d.c. ceiling of extra-low
voltage: IEC 61140.  0.5 mT: ICNIRP, Health Phys. 96, 504 (2009).  19.5 % oxygen: 29 CFR
1910.146(b).  Values as printed there, from memory.
"""

from __future__ import annotations

from dataclasses import replace

import made_case
import pytest

from wellseq.checks.judging import clear
from wellseq.emit.files.cautions_md import write
from wellseq.emit.hazards import EXTRA_LOW_V, TOUCH_V, hazards
from wellseq.model.trap import Trap


def cautions(**site: object) -> str:
    case = made_case.case()
    assert case.trap is not None
    trap = case.trap.model_copy(update={"site": case.trap.site.model_copy(update=site)})
    key = clear(replace(case, trap=trap))
    assert key is not None
    ((name, pieces),) = write(key)
    assert name == "cautions.md"
    return b"".join(pieces).decode()


def test_it_opens_by_saying_that_it_is_no_interlock() -> None:
    opening = cautions()[:900]
    assert "**It is not a safety interlock" in opening
    assert "It does not replace your laboratory's procedures" in opening


@pytest.mark.parametrize(
    "words",
    [
        "**The trap file names no rules of the laboratory's own.**",
        "**No forecast of any cloud was made.**",
        "IEC 61140",
        "IEC 60204-1",
        "Health Physics 96, 504 (2009)",
        "29 CFR 1910.146(b)",
        "19.5 % oxygen",
        "0.5 mT",
        "## Who must agree",
        "## Waits for triggers",
        "## Stored energy",
        "| dumped \\| next | line 6 | 1 |",
        "| R3 | run | 1 ms to 3 ms | 200 kHz to 1.6 MHz | 500 mV |",
        "| temperature of cool\\_e | 140 ± 40 K | measured \\*twice\\* |",
        "**Left above 60 V: lv1 at 100 V.**",
    ],
)
def test_it_says(words: str) -> None:
    assert words in " ".join(cautions().split())


def test_what_the_site_has_not_is_not_spoken_of_but_silence_is_named() -> None:
    text = cautions(magnet=False, cryogen="", source="")
    assert "0.5 mT" not in text
    assert "The trap file says nothing of: cryogen, source." in text


def test_no_name_acts_as_markup() -> None:
    text = cautions()
    assert "Gorse \\| bench" in text
    assert "none \\<here\\>" in text
    assert "<b>" not in text.replace("\\<b\\>", "")


def test_margins_come_nearest_to_the_limit_first() -> None:
    text = cautions()
    table = text[text.index("## Margins") :]
    assert table.index("slew-too-fast") < table.index("well-too-shallow")


def outputs() -> tuple[Trap, dict[str, object]]:
    case = made_case.case()
    assert case.trap is not None
    assert case.shipped is not None
    return case.trap, {one.output: one for one in hazards(case.trap, case.shipped)}


def test_hazards_are_outputs_flagged_or_able_to_exceed_the_touch_limit() -> None:
    _, found = outputs()
    assert (TOUCH_V, EXTRA_LOW_V) == (60.0, 120.0)
    # lv2 reaches 10 V only and is not flagged.
    assert list(found) == ["lv1", "lv3", "hv"]


def test_live_windows_run_from_row_to_row() -> None:
    _, found = outputs()
    run, caught = found["lv1"].windows
    # 100 V in 10 ms from 1 ms on: 60 V at 7 ms, and the staircase may be 50 mV, or 5 us, off.
    assert run == (0, pytest.approx(7e-3, abs=6e-6), pytest.approx(11e-3, rel=1e-12))
    assert caught == (1, 0.0, pytest.approx(4e-3, rel=1e-12))
    assert found["lv3"].windows == []
    assert found["hv"].windows == [
        (1, pytest.approx(1e-6, rel=1e-12), pytest.approx(5e-4, rel=1e-12))
    ]


def test_stored_energy_is_half_c_v_squared() -> None:
    _, found = outputs()
    assert found["hv"].stored_J == pytest.approx(0.5 * 2e-9 * 900**2, rel=1e-12)
    assert found["lv3"].stored_J is None

"""The ledger: small sequences on the page trap, their rows, measurements and gaps."""

from __future__ import annotations

import shutil
from pathlib import Path

import pytest

from wellseq.checks.case import Case
from wellseq.clouds.figures import Figure
from wellseq.clouds.forecast import Forecast, Row
from wellseq.model import effects
from wellseq.pipeline import compile_file

PAGES = Path(__file__).parents[1] / "pages"
HEAD = """wellseq 1
trap "page.trap.toml"
cloud pool is electron { number 1e7 ± 10 %; radius 1 mm; temperature 300 K }
cloud cold is antiproton { number 1e4 ± 10 %; radius 1 mm; temperature 300 K }
cloud bare is electron { number 1e7 }
pattern cradle { C5, C7 = -80 V; R6 = -20 V; others = 0 V }
sequence page {
"""


@pytest.fixture
def play(tmp_path: Path):
    shutil.copy(PAGES / "page.trap.toml", tmp_path)

    def play(*steps: str, cloud: str = "pool", trap: tuple[str, str] = ("", "")) -> Case:
        path = tmp_path / "page.trap.toml"
        text = (PAGES / "page.trap.toml").read_text("utf-8")
        path.write_text(text.replace(*trap) if trap[0] else text, "utf-8")
        body = [f"  begin with {cloud} in cradle at R6", *(f"  {step}" for step in steps)]
        unused = [one for one in ("pool", "cold", "bare") if one not in "\n".join(body)]
        lines = [
            line for line in HEAD.splitlines() if not any(f"cloud {one} " in line for one in unused)
        ]
        (tmp_path / "a.well").write_text("\n".join([*lines, *body, "}", ""]), "utf-8")
        case = compile_file(tmp_path / "a.well")
        assert case.forecast is not None, case.mistakes
        return case

    return play


def told(case: Case) -> Forecast:
    assert case.forecast is not None
    return case.forecast


def rows(case: Case, cloud: str = "pool") -> list[Row]:
    return [row for row in told(case).rows if row.cloud == cloud]


def within(inner: Figure, low: float, high: float) -> bool:
    return low <= inner.low <= inner.value <= inner.high <= high


def test_every_step_that_takes_time_has_a_row_with_its_figures(play) -> None:
    first, second = rows(play("hold for 1 s", "hold for 60 s"))
    assert within(first.figures["number"], 9e6, 1.1e7)
    assert first.figures["temperature"].value > second.figures["temperature"].value > 6.0
    assert second.figures["radius"].high > second.figures["radius"].low == pytest.approx(1e-3)
    assert 0 < first.figures["space_charge"].low < first.figures["space_charge"].high
    assert first.inside
    assert first.spread == "corners"


def test_the_same_input_gives_the_same_forecast(play) -> None:
    steps = ("hold for 1 s", "ramp { C5, C7 = -60 V } over 20 ms", "cool pool for 10 s until 20 K")
    assert repr(told(play(*steps))) == repr(told(play(*steps)))


def test_a_warmer_claim_or_a_longer_step_is_never_worse(play) -> None:
    def verdict(seconds: str, goal: str) -> str:
        case = play(f"cool pool for {seconds} until {goal}")
        return next(f.verdict.value for f in case.findings if f.name == "cooling-too-short")

    assert [verdict(s, "20 K") for s in ("1 s", "5 s", "20 s")] == ["fail", "unsure", "pass"]
    assert verdict("5 s", "100 K") == "pass"


def test_heating_that_is_not_stated_leaves_the_claim_unsure(play) -> None:
    case = play("cool pool for 60 s until 20 K", trap=('noise_heating = "10 mK/s"\n', ""))
    assert {f.name: f.verdict.value for f in case.blocked} == {
        "never-that-cold": "unsure",
        "cooling-too-short": "unsure",
    }
    figure = rows(case)[0].figures["temperature"]
    assert figure.high == 300.0


def test_antiprotons_cooled_by_nothing_stay_hot(play) -> None:
    case = play("cool cold for 60 s until 100 K", cloud="cold")
    assert {f.name for f in case.blocked} <= {"cooling-too-short", "never-that-cold"}
    assert case.blocked
    assert rows(case, "cold")[0].figures["temperature"].low > 299.0


def test_a_cloud_that_declares_little_has_a_row_and_blocks_nothing(play) -> None:
    case = play("hold for 1 s", cloud="bare")
    (row,) = rows(case, "bare")
    assert "the radius of bare is not declared" in row.cites
    assert not case.blocked
    asked = play("hold for 1 s", "require temperature of bare below 400 K", cloud="bare")
    (found,) = asked.blocked
    assert (found.name, found.verdict.value) == ("requirement-not-met", "unsure")
    assert "the temperature of bare is not declared" in found.message


def test_a_measured_value_takes_the_place_of_a_figure(play) -> None:
    case = play(
        "hold for 60 s",
        'assume temperature of pool 50 K ± 5 K because "log 12"',
        "require temperature of pool between 40 K and 60 K",
        "hold for 1 ms",
    )
    assert not case.blocked
    assert within(rows(case)[1].figures["temperature"], 44.0, 56.0)


def test_a_gap_is_settled_by_a_value_that_follows_at_once_only(play) -> None:
    steps = ("evaporate cold through C7 to 400 mV over 200 ms",)
    lost = play(*steps, cloud="cold")
    assert {gap.quantity for gap in told(lost).gaps} == {"temperature", "number"}
    assert all(gap.told == "evaporation-too-fast" for gap in told(lost).gaps)
    assume = 'assume temperature of cold 90 K ± 9 K because "log 12"'
    at_once = play(*steps, assume, cloud="cold")
    late = play(*steps, "hold for 1 s", assume, cloud="cold")
    replaced = [
        {gap.quantity: gap.replaced for gap in told(case).gaps}["temperature"]
        for case in (at_once, late)
    ]
    assert replaced == [True, False]


@pytest.mark.parametrize("number", ["1e14", "1", "2e8"])
def test_absurd_numbers_end_in_a_sentence(play, tmp_path: Path, number: str) -> None:
    case = play("hold for 1 s")
    path = tmp_path / "a.well"
    path.write_text(
        path.read_text("utf-8").replace("1e7 ± 10 %; radius 1 mm", f"{number}; radius 1 mm")
    )
    case = compile_file(path)
    assert case.forecast is not None
    assert {f.name for f in case.blocked} <= {"well-overfull", "forecast-out-of-range"}
    assert bool(case.blocked) is (number != "1")


def test_every_effect_that_changes_a_figure_has_a_handler() -> None:
    from wellseq.clouds.handlers import handled, handler_of

    named = {kind.__name__.lower() for kind in effects.Effect.__args__}
    assert handled() <= named
    assert named - handled() == {"acted"}
    assert handler_of(effects.Acted("pool")) is None

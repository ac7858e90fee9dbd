"""The trap as read: each value in base units, each helper, and what building it refuses."""

from __future__ import annotations

import math
from fractions import Fraction
from pathlib import Path

import pytest
from pydantic import ValidationError

from wellseq.model.trap import (
    Converter,
    Electrode,
    MagneticField,
    Margins,
    PairMargin,
    Rest,
    Switch,
    Trap,
    Trigger,
)
from wellseq.model.trap_file import read_trap, trap_from

POOL = Path(__file__).with_name("pool.trap.toml")


@pytest.fixture(scope="module")
def pool() -> Trap:
    trap, mistakes = read_trap(POOL, "pool.trap.toml")
    assert mistakes == ()
    assert trap is not None
    return trap


def test_every_value_of_the_file_arrives_in_base_units(pool: Trap) -> None:
    assert (pool.name, pool.file) == ("Tide pool", "pool.trap.toml")
    assert pool.source.encode() == POOL.read_bytes()
    assert pool.bore.model_dump() == {
        "temperature_K": 6.0,
        "patch_V": 0.025,
        "ends": "open",
        "noise_heating_K_per_s": 0.4,
        "expansion_time_s": 900.0,
    }
    assert (pool.site.magnet, pool.site.cryogen) == (True, "helium")
    assert (pool.site.source, pool.site.notes) == ("sealed positron emitter", "second floor")
    ring = pool.electrode("R2")
    assert (ring.from_m, ring.to_m, ring.radius_m, ring.sectors) == (0.0268, 0.0392, 0.015, 6)
    assert ring.length_m == pytest.approx(0.0124, rel=1e-12)
    assert ring.middle_m == pytest.approx(0.033, rel=1e-12)
    assert pool.radius_m == 0.015
    assert pool.margins.model_dump(exclude={"pairs"}) == {
        "depth_V": 0.5,
        "staircase_V": 0.02,
        "depth_over_temperature": 10.0,
        "neighbour_difference_V": 1200.0,
        "separation_m": 0.006,
        "table_rows": 65536,
    }


def test_converter_values_and_derived_ones(pool: Trap) -> None:
    output = pool.output("lv01")
    assert isinstance(output, Converter)
    assert (output.low_V, output.high_V, output.slew_V_per_s, output.bits) == (-140, 140, 12e6, 16)
    assert output.clock_s == Fraction(1, 10**6)
    assert output.time_constant_s == Fraction(2, 10**6)
    assert (output.gain, output.gain_spread) == (1.0003, 0.0001)
    assert (output.offset_V, output.offset_spread_V) == (0.0004, 0.0002)
    assert (output.noise_V, output.capacitance_F, output.hazardous) == (50e-6, 300e-12, False)
    assert output.code_V == pytest.approx(280 / 65535, rel=1e-15)
    assert output.electrode_V(100.0) == pytest.approx(100.0304, rel=1e-15)
    assert output.nominal_V(output.electrode_V(-77.5)) == pytest.approx(-77.5, rel=1e-14)
    assert output.reach_V == pytest.approx((-140.0416, 140.0424), rel=1e-14)


def test_this_yardstick_sees_codes_counted_as_two_to_the_bits(pool: Trap) -> None:
    output = pool.output("lv01")
    assert isinstance(output, Converter)
    assert output.code_V != pytest.approx(280 / 65536, rel=1e-6)


def test_keys_left_out_take_their_defaults(pool: Trap) -> None:
    output = pool.output("lv20")
    assert isinstance(output, Converter)
    assert (output.between_rows, output.time_constant_s, output.delay_s) == ("hold", 0, 0)
    assert (output.gain, output.gain_spread, output.offset_V, output.offset_spread_V) == (
        1,
        0,
        0,
        0,
    )
    assert (output.noise_V, output.capacitance_F, output.hazardous) == (0.0, None, False)
    margins = Margins()
    assert (margins.depth_V, margins.staircase_V, margins.separation_m) == (0.5, 0.02, 0.005)
    assert (margins.neighbour_difference_V, margins.table_rows) == (1200.0, 65536)
    assert Trigger(name="t").within_s is None


def test_switch_line_and_trigger(pool: Trap) -> None:
    switch = pool.output_of("G1")
    assert isinstance(switch, Switch)
    assert (switch.levels, switch.passes) == (("lv20", -4500.0), ("lv20",))
    assert (switch.edge_s, switch.clock_s) == (Fraction(90, 10**9), Fraction(125, 10**10))
    assert (switch.spread_V, switch.hazardous) == (5.0, True)
    valve, vacuum = pool.line("valve"), pool.line("vacuum_ok")
    assert (valve.states, valve.initial, valve.kind) == (("closed", "open"), "closed", "output")
    assert (vacuum.states, vacuum.initial, vacuum.kind) == (("off", "on"), "off", "input")
    trigger = pool.trigger("bunch_arrival")
    assert (trigger.within_s, trigger.latency_s) == (Fraction(130), Fraction(1, 4 * 10**6))
    assert trigger.jitter_s == Fraction(20, 10**9)


def test_names_and_where_they_lead(pool: Trap) -> None:
    assert pool.names == {
        *("G1", "C1", "R2", "C3"),
        *("lv01", "lv02", "lv20", "hv1"),
        *("valve", "vacuum_ok", "bunch_arrival"),
    }
    assert [pool.index(item.name) for item in pool.electrodes] == [0, 1, 2, 3]
    assert pool.between("C1", "C3") == ("C1", "R2", "C3")
    assert pool.between("R2", "R2") == ("R2",)
    assert pool.between("C3", "C1") == ()
    assert pool.electrodes_of("lv01") == ("C1", "C3")
    assert pool.electrodes_of("lv20") == ()


@pytest.mark.parametrize("look_up", ["index", "electrode", "output", "line", "trigger", "rest_of"])
def test_looking_up_what_is_not_there_names_it(pool: Trap, look_up: str) -> None:
    with pytest.raises(KeyError, match="'nowhere'"):
        getattr(pool, look_up)("nowhere")


def test_rest_is_where_outputs_stand_before_the_first_statement(pool: Trap) -> None:
    assert pool.rest_of("lv01") == -5.0
    assert pool.rest_of("lv02") == 0.0
    assert pool.rest_of("lv20") == 10.0
    assert pool.rest_of("hv1") == -4500.0
    assert dict(pool.rest) == {"G1": -4500.0, "C1": -5.0, "R2": 0.0, "C3": -5.0}


def test_a_pair_has_its_own_largest_difference(pool: Trap) -> None:
    assert pool.margins.difference_V("C1", "G1") == 6000.0
    assert pool.margins.difference_V("C1", "R2") == 1200.0


@pytest.mark.parametrize(
    ("z_m", "field_T"),
    [(-1.0, 3.0), (-0.4, 3.0), (-0.2, 2.3), (0.0, 1.6), (0.1, 1.55), (0.2, 1.5), (9.0, 1.5)],
)
def test_field_is_linear_between_points_and_constant_outside(
    pool: Trap, z_m: float, field_T: float
) -> None:
    assert pool.field.at(z_m) == pytest.approx(field_T, rel=1e-14)
    assert pool.field.sign == 1


def test_uniform_field_is_one_point() -> None:
    field = MagneticField(uniform_T=-1.6)
    assert (field.along, field.sign, field.at(3.0)) == (((0.0, -1.6),), -1, -1.6)


def test_a_trap_is_frozen_and_hashable(pool: Trap) -> None:
    again, _ = read_trap(POOL, "pool.trap.toml")
    assert again == pool
    assert hash(again) == hash(pool)
    with pytest.raises(ValidationError, match="frozen"):
        pool.name = "other"  # type: ignore[misc]


def test_composed_and_decomposed_names_are_the_same() -> None:
    source = POOL.read_text(encoding="utf-8").replace("R2", "Ré")
    trap, mistakes = trap_from(source.replace("é", "e\u0301"), "pool")
    assert mistakes == ()
    assert trap is not None
    assert trap.electrode("Ré") is trap.electrode("Re\u0301")


def electrode(name: str, from_m: float, to_m: float) -> Electrode:
    return Electrode(name=name, from_m=from_m, to_m=to_m, radius_m=0.01, output="a")


def converter(name: str = "a", **more: object) -> Converter:
    values = {"range_V": (-10, 10), "slew_V_per_s": 1e6, "bits": 16, "clock_s": Fraction(1, 10**6)}
    return Converter.model_validate({"name": name, **values, **more})


def test_a_trap_can_be_built_from_numbers() -> None:
    trap = Trap(
        name="bench",
        field=MagneticField(uniform_T=0.1),
        electrodes=(electrode("A", 0.0, 0.01), electrode("B", 0.011, 0.02)),
        outputs=(converter(),),
        rests=(Rest(name="a", level=3.0),),
    )
    assert trap.rest == {"A": 3.0, "B": 3.0}
    assert trap.output("a") == converter()


@pytest.mark.parametrize(
    ("change", "said"),
    [
        ({"electrodes": (electrode("A", 0, 2), electrode("B", 1, 3))}, "begins 1000 mm before"),
        ({"electrodes": (electrode("A", 0, 1), electrode("A", 1, 2))}, "already taken"),
        ({"electrodes": ()}, "no electrode"),
        ({"outputs": (converter("b"),)}, "no output 'a'"),
        ({"outputs": (converter(), converter("b"))}, "'b' drives no electrode"),
        ({"rests": (Rest(name="A", level=11.0),)}, "cannot stand at 11 V"),
        (
            {"margins": Margins(pairs=(PairMargin(between=("A", "Q"), difference_V=1.0),))},
            "no electrode 'Q'",
        ),
    ],
)
def test_an_unsound_trap_cannot_be_built(change: dict[str, object], said: str) -> None:
    sound = {
        "name": "bench",
        "field": MagneticField(uniform_T=0.1),
        "electrodes": (electrode("A", 0.0, 0.01),),
        "outputs": (converter(),),
    }
    Trap.model_validate(sound)
    with pytest.raises(ValidationError, match=said):
        Trap.model_validate({**sound, **change})


@pytest.mark.parametrize("value", [math.nan, math.inf, -math.inf])
def test_no_number_that_is_not_finite_gets_in(value: float) -> None:
    with pytest.raises(ValidationError, match="not a finite number"):
        electrode("A", value, 1.0)
    with pytest.raises(ValidationError, match="not a finite number"):
        MagneticField(uniform_T=value)
    with pytest.raises(ValidationError, match="not a finite number"):
        Margins(depth_over_temperature=value)

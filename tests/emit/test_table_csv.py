"""The table of a block: RFC 4180, whole numbers, volts that agree with the codes exactly."""

from __future__ import annotations

import csv
import io
import time
from dataclasses import replace
from fractions import Fraction

import made_case
import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from wellseq.checks.judging import clear
from wellseq.emit.columns import Column, Kind, scale_of
from wellseq.emit.files.table_csv import write
from wellseq.model.trap import Converter
from wellseq.timeline.shipped import Shipped, ShippedBlock


def tables() -> dict[str, bytes]:
    return {name: b"".join(pieces) for name, pieces in write(made_case.cleared())}


def test_one_table_a_block_with_crlf_and_a_header() -> None:
    found = tables()
    assert list(found) == ["block-1-run.csv", "block-2-bunch.csv"]
    for content in found.values():
        assert content.count(b"\r\n") == content.count(b"\n") == content.count(b"\r")
        assert content.endswith(b"\r\n")
        assert content.startswith(
            b"tick,lv1.code,lv1.V,lv2.code,lv2.V,lv3.code,lv3.V,hv.level,shutter,vacuum_ok\r\n"
        )


def test_every_cell_is_what_was_shipped() -> None:
    shipped = made_case.case().shipped
    assert shipped is not None
    for block, content in zip(shipped.blocks, tables().values(), strict=True):
        rows = list(csv.DictReader(io.StringIO(content.decode(), newline="")))
        assert [int(row["tick"]) for row in rows] == block.ticks.tolist()
        for column, name in enumerate(shipped.converters):
            assert [int(row[f"{name}.code"]) for row in rows] == block.codes[:, column].tolist()
        assert [int(row["hv.level"]) for row in rows] == block.levels[:, 0].tolist()
        states = ["closed", "open"]
        assert [states.index(row["shutter"]) for row in rows] == block.states[:, 0].tolist()


def volts_of(converter: Converter, codes: list[int]) -> list[float]:
    column = Column("a", Kind.CODE, 2**converter.bits - 1, scale_of(converter))
    return column.volts(codes)


@given(
    st.floats(-1e4, 0), st.floats(1, 1e4), st.integers(1, 24), st.floats(0.5, 2), st.floats(-1, 1)
)
def test_volts_are_the_floats_nearest_to_the_exact_value(
    low: float, high: float, bits: int, gain: float, offset: float
) -> None:
    converter = Converter(
        name="a",
        range_V=(low, high),
        slew_V_per_s=1.0,
        bits=bits,
        clock_s=Fraction(1),
        gain_with_spread=(gain, 0.0),
        offset_with_spread_V=(offset, 0.0),
    )
    codes = sorted({0, 1, 2**bits // 3, 2**bits - 1})
    for code, volts in zip(codes, volts_of(converter, codes), strict=True):
        nominal = Fraction(low) + code * (Fraction(high) - Fraction(low)) / (2**bits - 1)
        assert volts == float(Fraction(gain) * nominal + Fraction(offset))


def test_naive_floats_would_not_agree() -> None:
    # Companion: the usual float formula differs from the exact one in a good share of all codes.
    converter = made_case.trap().output("lv1")
    assert isinstance(converter, Converter)
    codes = list(range(0, 65536, 97))
    naive = [converter.electrode_V(converter.low_V + code * converter.code_V) for code in codes]
    assert sum(a != b for a, b in zip(naive, volts_of(converter, codes), strict=True)) > 50


@pytest.mark.parametrize("code", [-1, 2**16])
def test_a_code_outside_its_bits_is_never_written(code: int) -> None:
    key = made_case.cleared()
    shipped = key.case.shipped
    assert shipped is not None
    codes = shipped.blocks[0].codes.copy()
    codes[1, 0] = code
    wrong = replace(shipped, blocks=(replace(shipped.blocks[0], codes=codes),))
    bent = clear(replace(key.case, shipped=wrong))
    assert bent is not None
    with pytest.raises(ValueError, match="lv1"):
        [list(pieces) for _, pieces in write(bent)]


def test_twenty_thousand_rows_of_thirty_outputs_are_quick() -> None:
    rows = 20_000
    case = made_case.case()
    assert case.trap is not None
    lv1 = case.trap.output("lv1")
    assert isinstance(lv1, Converter)
    outputs = tuple(lv1.model_copy(update={"name": f"o{n}"}) for n in range(30))
    electrodes = tuple(
        case.trap.electrodes[0].model_copy(
            update={"name": f"E{n}", "from_m": n / 50, "to_m": n / 50 + 0.01, "output": f"o{n}"}
        )
        for n in range(30)
    )
    trap = case.trap.model_copy(
        update={"outputs": outputs, "electrodes": electrodes, "lines": (), "rest": ()}
    )
    trap = type(trap).model_validate(
        {name: getattr(trap, name) for name in type(trap).model_fields}
    )
    codes = np.random.default_rng(4).integers(0, 65536, (rows, 30))
    none = np.zeros((rows, 0), np.int64)
    block = ShippedBlock(
        made_case.blocks()[0], Fraction(1, 10**6), np.arange(rows), codes, none, none, (), ()
    )
    shipped = Shipped(tuple(one.name for one in outputs), (), (), (block,), {})
    key = clear(replace(case, trap=trap, shipped=shipped))
    assert key is not None
    start = time.process_time()
    size = sum(len(piece) for _, pieces in write(key) for piece in pieces)
    assert size > 10**7
    assert time.process_time() - start < 1.5

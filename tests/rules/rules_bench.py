"""A small trap without lag or noise, and the rulings on pieces of a sequence."""

from __future__ import annotations

from pathlib import Path
from tempfile import TemporaryDirectory

from wellseq.checks.case import Case
from wellseq.pipeline import compile_file
from wellseq.rules.rulings import Ruling

TRAP = """\
wellseq-trap = 1
name = "Mudflat"

[field]
uniform = "1 T"

[bore]
patch = "2 mV"

[site]
rules = ["mudflat.rules"]

[[electrode]]
name = "G1"
from = "0 mm"
to = "20 mm"
radius = "10 mm"
output = "hv1"
[[electrode]]
name = "C1"
from = "21 mm"
to = "41 mm"
radius = "10 mm"
output = "lv1"
[[electrode]]
name = "R2"
from = "42 mm"
to = "62 mm"
radius = "10 mm"
sectors = 4
output = "lv2"
[[electrode]]
name = "C3"
from = "63 mm"
to = "83 mm"
radius = "10 mm"
output = "lv3"

[[output]]
name = "lv1"
range = ["-128 V", "127 V"]
slew = "100 V/us"
bits = 8
clock = "1 us"
between_rows = "line"
[[output]]
name = "lv2"
range = ["-128 V", "127 V"]
slew = "100 V/us"
bits = 16
clock = "1 us"
time_constant = "2 us"
gain = "1.000 ± 0.001"
noise = "1 mV"
[[output]]
name = "lv3"
range = ["-128 V", "127 V"]
slew = "100 V/us"
bits = 16
clock = "1 us"
between_rows = "line"
[[output]]
name = "lv0"
range = ["-128 V", "127 V"]
slew = "100 V/us"
bits = 8
clock = "1 us"
[[output]]
name = "hv1"
kind = "switch"
levels = ["lv0", "-500 V"]
edge = "80 ns"
clock = "1 us"
hazardous = true

[[line]]
name = "valve"
states = ["closed", "open"]
initial = "closed"
clock = "1 us"
[[line]]
name = "lamp"
states = ["off", "on"]
initial = "off"
clock = "1 us"
[[line]]
name = "door"
states = ["ajar", "shut"]
kind = "input"
clock = "1 us"

[[trigger]]
name = "bell"
within = "10 ms"
[[trigger]]
name = "horn"
within = "1 s"
latency = "3 us"
jitter = "1 us"

[margins]
staircase = "2 V"
neighbour_difference = "2 kV"
"""


def compiled(rules: str, piece: str, clouds: str = "") -> Case:
    """The case of a sequence of these steps under these rules."""
    with TemporaryDirectory() as name:
        folder = Path(name)
        (folder / "mudflat.trap.toml").write_text(TRAP, "utf-8")
        (folder / "mudflat.rules").write_text(rules, "utf-8")
        text = f'wellseq 1\ntrap "mudflat.trap.toml"\n{clouds}\nsequence tide {{\n{piece}\n}}\n'
        (folder / "tide.well").write_text(text, "utf-8")
        return compile_file(folder / "tide.well", shown="tide.well")


def ruling(sentence: str, piece: str, clouds: str = "") -> Ruling:
    """What came of one rule; fails loudly when the text has mistakes."""
    case = compiled(f"rule one: {sentence}", piece, clouds)
    assert case.mistakes == ()
    assert case.rulings is not None
    return case.rulings.all[-1]

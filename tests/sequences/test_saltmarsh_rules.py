"""The night keeps every interlock rule; one line changed breaks each of them, and says where."""

from __future__ import annotations

from pathlib import Path

HOME = Path(__file__).resolve().parents[2] / "sequences" / "saltmarsh"

EDITS = {
    # rule: (what the night says, what it says instead, the line a finding points at, verdict)
    "doors_closed_at_high_voltage": (
        "expect cage_door closed",
        "expect cage_door open",
        "throw G2 to -hv",
        "fail",
    ),
    "vacuum_good_at_high_voltage": (
        "expect vacuum_gauge good",
        "expect vacuum_gauge bad",
        "throw G2 to -hv",
        "fail",
    ),
    "detectors_spared_from_crowds": (
        "is positron   { number 2e6",
        "is positron   { number 2e7",
        "release positrons through C19",
        "unsure",
    ),
    "shutters_closed_at_live_detectors": (
        "  set mcp_bias on\n",
        "  set mcp_bias on; set valve open\n",
        "set mcp_bias on; set valve open",
        "fail",
    ),
    "no_drive_while_catching": (
        "rule no_such: never valve open and valve closed",
        "",
        "",
        "",
    ),
    "detectors_off_at_end": (
        "  set mcp_bias off\n  ramp { C1..C24 = 0 V }",
        "  ramp { C1..C24 = 0 V }",
        "hold for 1 s\n}",
        "fail",
    ),
    "shutters_closed_at_end": (
        "  hold for 1 s\n}",
        "  hold for 1 s; set positron_valve open\n}",
        "hold for 1 s; set positron_valve open",
        "fail",
    ),
    "gates_need_vacuum": (
        "expect vacuum_gauge good",
        "expect vacuum_gauge bad",
        "throw G2 to -hv",
        "fail",
    ),
    "beam_may_come": ("  set valve open\n", "  hold for 1 ms\n", "catch bunch {", "fail"),
    "let_valve_settle": (
        "set valve open\n  hold for 100 ms",
        "set valve open\n  hold for 10 ms",
        "catch bunch {",
        "fail",
    ),
    "shut_after_catch": ("  set valve closed\n", "  hold for 9 s\n", "catch bunch {", "fail"),
    "one_valve_at_a_time": (
        "      hold for 3 s\n",
        "      set valve open\n",
        "set positron_valve open",
        "fail",
    ),
    "antiprotons_held_while_positrons_come": (
        "  ramp cradle over 500 ms\n",
        "  ramp { C9 = -30 V } over 500 ms\n",
        "set positron_valve open",
        "unsure",
    ),
    "detector_warms_up": ("  set mcp_bias on\n", "  hold for 1 ms\n", "release bunch", "fail"),
    "two_releases": (
        "  hold for 500 ms\n",
        "  release bunch through C12 to -10 V over 20 ms\n",
        "release positrons through C19",
        "fail",
    ),
    "gates_rest": (
        "cool bunch with coolant for 60 s\n",
        "cool bunch with coolant for 200 s\n",
        "cool bunch with coolant for 200 s",
        "fail",
    ),
    "gentle_right_half": (
        "through C19, C20 to 5 V over 20 ms",
        "through C19, C20 to 5 V over 5 ms",
        "release positrons through C19",
        "fail",
    ),
}

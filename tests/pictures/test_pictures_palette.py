"""Colours: contrast by WCAG 2.2 in both themes, and told apart by colour-blind eyes."""

from __future__ import annotations

import re
from itertools import combinations
from pathlib import Path

import numpy as np
import pytest

from wellseq.emit.pictures import palette
from wellseq.emit.pictures.page import STYLES, own

FOLDER = Path(palette.__file__).parent
# F. Viénot, H. Brettel, J. D. Mollon, Color Research and Application 24, 243 (1999): linear RGB as
# protanopes and deuteranopes see it; values from memory.
SEEN_BY = {
    "protanope": np.array([[0.112, 0.888, 0.0], [0.112, 0.888, 0.0], [0.004, -0.004, 1.0]]),
    "deuteranope": np.array([[0.292, 0.708, 0.0], [0.292, 0.708, 0.0], [-0.022, 0.022, 1.0]]),
}


def test_black_on_white_is_twenty_one() -> None:
    assert palette.contrast("#000000", "#ffffff") == pytest.approx(21.0)
    assert palette.contrast("#777777", "#ffffff") == pytest.approx(4.48, abs=0.01)
    assert palette.contrast("#777777", "#ffffff") < palette.TEXT_LEAST


@pytest.mark.parametrize("theme", palette.THEMES)
def test_text_and_lines_can_be_read(theme: str) -> None:
    colours = palette.THEMES[theme]
    for ground in palette.GROUNDS:
        for text in (*palette.TEXTS, *(palette.CLOUDS if ground != "mark" else ())):
            if ground == "mark" and text not in ("ink", "faint"):
                continue
            ratio = palette.contrast(colours[text], colours[ground])
            assert ratio >= palette.TEXT_LEAST, (text, ground, ratio)
        for line in palette.LINES:
            ratio = palette.contrast(colours[line], colours[ground])
            assert ratio >= palette.LINE_LEAST, (line, ground, ratio)


def test_the_page_takes_its_colours_from_here_alone() -> None:
    for name in STYLES:
        text = (FOLDER / name).read_text("utf-8")
        assert not re.findall(r"#[0-9a-fA-F]{3,8}\b|rgb\(|hsl\(", text)
        used = set(re.findall(r"var\(--([a-z0-9-]+)\)", text)) - {"tall", "text", "small", "cloud"}
        assert used <= set(palette.LIGHT)
    sheet = own(*STYLES)
    assert sheet.count(palette.DARK["paper"]) == 2
    assert "url(" not in sheet
    assert "@import" not in sheet


@pytest.mark.parametrize("theme", palette.THEMES)
@pytest.mark.parametrize("eyes", SEEN_BY)
def test_clouds_differ_for_colour_blind_eyes_or_by_their_dash(theme: str, eyes: str) -> None:
    colours = palette.THEMES[theme]
    seen = {name: _lab(SEEN_BY[eyes] @ palette.linear(colours[name])) for name in palette.CLOUDS}
    for one, other in combinations(palette.CLOUDS[:3], 2):
        assert np.linalg.norm(seen[one] - seen[other]) > 8, (one, other)
    looks = [palette.cloud_look(number) for number in range(30)]
    assert len(set(looks)) == len(looks)


def _lab(linear: np.ndarray) -> np.ndarray:
    """CIE 1976 L*a*b* for D65 of linear RGB."""
    to_xyz = np.array(
        [[0.4124, 0.3576, 0.1805], [0.2126, 0.7152, 0.0722], [0.0193, 0.1192, 0.9505]]
    )
    ratio = np.clip(to_xyz @ np.clip(linear, 0, 1), 0, None) / np.array([0.9505, 1.0, 1.089])
    root = np.where(ratio > 0.008856, np.cbrt(ratio), 7.787 * ratio + 16 / 116)
    return np.array([116 * root[1] - 16, 500 * (root[0] - root[1]), 200 * (root[1] - root[2])])

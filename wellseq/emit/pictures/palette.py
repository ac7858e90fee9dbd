"""The colours of all pictures, and how well one can be read on another.

Each colour comes from what it stands for: copper for the stack, blue for negative and rust for
positive charge and voltage, ink for what is measured.  A cloud has a colour, a dash and a sign of
its own, so no colour ever stands alone.  Contrast: WCAG 2.2 (W3C, 2023), definitions of relative
luminance and contrast ratio; text needs 4.5, lines and marks 3.
"""

from __future__ import annotations

from collections.abc import Mapping

Theme = Mapping[str, str]

LIGHT: Theme = {
    "paper": "#fbfaf6",
    "raised": "#f1eee6",
    "ink": "#1c2126",
    "faint": "#565d64",
    "hair": "#cfcabd",
    "copper": "#d9a27a",
    "copper-edge": "#85481c",
    "minus": "#0b62a0",
    "plus": "#a8430b",
    "good": "#146b3a",
    "bad": "#a11d1d",
    "unsure": "#74308a",
    "mark": "#ffe9a8",
    "cloud-1": "#0b62a0",
    "cloud-2": "#a8430b",
    "cloud-3": "#00694d",
    "cloud-4": "#8a2f74",
    "cloud-5": "#6b5600",
    "cloud-6": "#3d4452",
}
DARK: Theme = {
    "paper": "#13171b",
    "raised": "#1e242a",
    "ink": "#eceae4",
    "faint": "#a9b0b6",
    "hair": "#3b444c",
    "copper": "#74482a",
    "copper-edge": "#d59a6e",
    "minus": "#6fbcf4",
    "plus": "#ff9f63",
    "good": "#6fd193",
    "bad": "#ff8f86",
    "unsure": "#d9a2ee",
    "mark": "#4a3d10",
    "cloud-1": "#6fbcf4",
    "cloud-2": "#ff9f63",
    "cloud-3": "#55d3a8",
    "cloud-4": "#f0a0d8",
    "cloud-5": "#e3c548",
    "cloud-6": "#c3cad8",
}
THEMES = {"light": LIGHT, "dark": DARK}
GROUNDS = ("paper", "raised", "mark")
"""What text is set on."""
TEXTS = ("ink", "faint", "minus", "plus", "good", "bad", "unsure")
CLOUDS = tuple(f"cloud-{number}" for number in range(1, 7))
LINES = ("copper-edge", *CLOUDS)
DASHES = ("", "7 3", "2 3", "10 3 2 3", "5 2 2 2 2 2", "14 4")
"""The dash of each cloud's line, in px; together with CLOUDS it comes round after six."""
TEXT_LEAST = 4.5
LINE_LEAST = 3.0


def cloud_look(number: int) -> tuple[str, str]:
    """(name of the colour, dash) of the cloud of that number, from 0; after six it comes round."""
    return CLOUDS[number % len(CLOUDS)], DASHES[(number + number // len(CLOUDS)) % len(DASHES)]


def contrast(one: str, other: str) -> float:
    """The contrast ratio of two colours `#rrggbb`, 1 to 21."""
    high, low = sorted((luminance(one), luminance(other)), reverse=True)
    return (high + 0.05) / (low + 0.05)


def luminance(colour: str) -> float:
    """Relative luminance of `#rrggbb`, 0 to 1."""
    red, green, blue = linear(colour)
    return 0.2126 * red + 0.7152 * green + 0.0722 * blue


def linear(colour: str) -> tuple[float, float, float]:
    """Linear-light red, green and blue of `#rrggbb`, 0 to 1 (IEC 61966-2-1)."""
    parts = [int(colour[at : at + 2], 16) / 255 for at in (1, 3, 5)]
    red, green, blue = (
        part / 12.92 if part <= 0.04045 else ((part + 0.055) / 1.055) ** 2.4 for part in parts
    )
    return red, green, blue


def sheet() -> str:
    """The colours as CSS: light, dark when the reader's machine asks for it, light in print."""
    light, dark = (
        "".join(f"--{name}:{colour};" for name, colour in theme.items()) for theme in (LIGHT, DARK)
    )
    return (
        f":root{{color-scheme:light dark;{light}}}\n"
        "@media screen and (prefers-color-scheme:dark){:root:not([data-theme=light])"
        f"{{{dark}}}}}\n"
        f"@media screen{{:root[data-theme=dark]{{color-scheme:dark;{dark}}}"
        f":root[data-theme=light]{{color-scheme:light}}}}\n"
    )

"""View → still pictures for papers and logbooks: one of the stack, one of each cloud.

The stack's still shows the potential along the axis over all steps, with the electrodes in section
above it; a cloud's still shows where it sits and how deep, with the certificate and the limit.
matplotlib draws them and is imported only then; nothing of the machine gets into the bytes.
Lengths are in mm in the drawings, depths and potentials in V, both on scales even near zero and
logarithmic beyond.
"""

from __future__ import annotations

import warnings
from collections.abc import Iterator
from contextlib import contextmanager
from importlib.util import find_spec
from io import BytesIO
from typing import TYPE_CHECKING, Any

import numpy as np

from wellseq.checks.numbers import amount
from wellseq.emit.escape import file_name
from wellseq.emit.pictures.markup import cut
from wellseq.emit.pictures.palette import DASHES, LIGHT, cloud_look
from wellseq.emit.pictures.rows import part_name
from wellseq.emit.pictures.scale import DEPTH_SOFT_V, SOFT_V
from wellseq.emit.pictures.score import WHOLE, Cell, Score
from wellseq.emit.pictures.stage import Floats, Stage
from wellseq.emit.pictures.tracks import Stay, Track
from wellseq.emit.pictures.view import View

if TYPE_CHECKING:
    from matplotlib.figure import Figure

KINDS = ("pdf", "png", "svg")
ROWS = 700
TICKS_MOST = 26
STYLE: dict[str, Any] = {
    "font.family": "sans-serif",
    "font.sans-serif": ["DejaVu Sans"],
    "font.size": 8,
    "axes.linewidth": 0.7,
    "axes.edgecolor": LIGHT["ink"],
    "figure.dpi": 100,
    "savefig.dpi": 300,
    "pdf.fonttype": 42,
    "svg.fonttype": "path",
    "svg.hashsalt": "wellseq",
    "path.simplify": False,
    "text.parse_math": False,
}
NAMELESS: dict[str, dict[str, None]] = {
    "png": {"Software": None},
    "svg": {"Date": None, "Creator": None},
    "pdf": {"CreationDate": None, "Creator": None, "Producer": None},
}
"""What a file would else say of the clock and of the program that drew it."""


def missing() -> str:
    """What has to be installed first; empty when nothing has."""
    if find_spec("matplotlib"):
        return ""
    return "matplotlib is not installed: pip install 'wellseq[pictures]'"


def stills(view: View, kind: str) -> Iterator[tuple[str, bytes]]:
    """(end of the file's name, its bytes) of every still, in one of KINDS.

    A case without a sequence over time has the still of its stack alone, without a trap none.
    """
    with _own_style():
        if view.stage is None:
            return
        if view.axis is None:
            yield f"stack.{kind}", _bytes(_units(view.stage), kind)
            return
        yield f"stack.{kind}", _bytes(_stack(view, view.stage, view.axis), kind)
        for number, track in enumerate(view.tracks):
            ending = f"cloud-{number + 1}-{file_name(track.name)}.{kind}"
            yield ending, _bytes(_cloud(view, view.stage, view.axis, number, track), kind)


def stack_still(stage: Stage, kind: str) -> bytes:
    """The still of a trap alone: its section and the potential that each electrode makes per V."""
    with _own_style():
        return _bytes(_units(stage), kind)


@contextmanager
def _own_style() -> Iterator[None]:
    """Our own settings and no others, whatever the reader's matplotlib is told to do."""
    import matplotlib

    settings: Any = matplotlib.rcParams
    with matplotlib.rc_context(), warnings.catch_warnings():
        # A letter that the font lacks becomes a box; the name is in the page all the same.
        warnings.filterwarnings("ignore", message=".*[Gg]lyph.*missing")
        matplotlib.rcdefaults()
        settings.update(STYLE)
        yield


def _bytes(figure: Figure, kind: str) -> bytes:
    stream = BytesIO()
    figure.savefig(stream, format=kind, metadata=NAMELESS[kind])
    return stream.getvalue()


def _figure(width: float, height: float) -> Figure:
    from matplotlib.backends.backend_agg import FigureCanvasAgg
    from matplotlib.figure import Figure as Empty

    figure = Empty(figsize=(width, height), layout="constrained")
    FigureCanvasAgg(figure)
    return figure


def _section(axes: Any, stage: Stage) -> None:
    """Both walls of every electrode, one mm as long along the axis as across it."""
    from matplotlib.patches import Rectangle

    for number, one in enumerate(stage.trap.electrodes):
        radius, thick = one.radius_m * 1e3, one.radius_m * 160
        for low in (radius, -radius - thick):
            wall = Rectangle(
                (one.from_m * 1e3, low),
                one.length_m * 1e3,
                thick,
                facecolor=LIGHT["copper"],
                edgecolor=LIGHT["copper-edge"],
                linewidth=0.5,
            )
            axes.add_patch(wall)
        lift = radius + thick * (1.4 + 2.9 * (number % 3))
        axes.text(one.middle_m * 1e3, lift, cut(one.name, 6), ha="center", va="bottom", size=4.5)
    most = max(one.radius_m for one in stage.trap.electrodes) * 1e3
    axes.set_ylim(-1.3 * most, 2.7 * most)
    axes.set_aspect("equal", anchor="S")
    axes.axhline(0.0, color=LIGHT["faint"], linewidth=0.5, dashes=(8, 3, 2, 3))
    axes.set_axis_off()


def _units(stage: Stage) -> Figure:
    figure = _figure(7.0, 3.6)
    above, below = figure.subplots(2, 1, sharex=True, height_ratios=(1, 2.2))
    _section(above, stage)
    for number, unit in enumerate(stage.unit if stage.solved else ()):
        below.plot(
            stage.z_m * 1e3,
            unit,
            color=LIGHT["ink"],
            linewidth=0.9,
            dashes=_dashes(number) or (None, None),
        )
    below.set_xlim(stage.low_m * 1e3, stage.high_m * 1e3)
    below.set_xlabel("place along the axis / mm")
    below.set_ylabel("potential on the axis\nper volt / (V/V)")
    return figure


def _stack(view: View, stage: Stage, axis: Score) -> Figure:
    """Potential over place and steps, electrodes above, tracks of clouds over it."""
    from matplotlib.colors import AsinhNorm, LinearSegmentedColormap

    figure = _figure(7.0, 7.4)
    above, below = figure.subplots(2, 1, sharex=True, height_ratios=(1, 7))
    _section(above, stage)
    places, potentials = _potentials(view, stage, axis)
    most = max(1e-9, float(np.max(np.abs(potentials), initial=0.0)))
    shades = LinearSegmentedColormap.from_list("", [LIGHT["minus"], LIGHT["paper"], LIGHT["plus"]])
    norm = AsinhNorm(linear_width=SOFT_V, vmin=-most, vmax=most)
    z_mm = stage.z_m * 1e3
    mesh = below.pcolormesh(
        z_mm, places, potentials, cmap=shades, norm=norm, shading="nearest", rasterized=True
    )
    levels = [level for level in (-1000.0, -100.0, -10.0, 10.0, 100.0, 1000.0) if abs(level) < most]
    if levels and len(places) > 1:
        below.contour(
            z_mm,
            places,
            potentials,
            levels,
            colors=LIGHT["ink"],
            linewidths=0.35,
            linestyles="solid",
        )
    for number, track in enumerate(view.tracks):
        _track(below, axis, number, track)
    bar = figure.colorbar(mesh, ax=below, pad=0.01, fraction=0.03, aspect=50)
    bar.set_ticks([0.0, *levels], labels=[amount(level, "V") for level in (0.0, *levels)])
    bar.ax.minorticks_off()
    bar.set_label("potential on the axis")
    below.set_ylim(WHOLE, 0)
    below.set_xlim(stage.low_m * 1e3, stage.high_m * 1e3)
    below.set_xlabel("place along the axis / mm")
    _part_ticks(below.yaxis, axis)
    below.grid(axis="y", color=LIGHT["faint"], linewidth=0.3)
    if view.tracks:
        below.legend(loc="lower left", frameon=True, fontsize=7)
    return figure


def _potentials(view: View, stage: Stage, axis: Score) -> tuple[Floats, Floats]:
    """(rows,) places on the axis and (rows, places) volts at them."""
    wanted = (np.arange(ROWS) + 0.5) / ROWS * WHOLE
    cells = iter(axis.cells)
    cell = next(cells)
    rows = []
    for place in wanted:
        while place > cell.bottom and (following := next(cells, None)) is not None:
            cell = following
        rows.append(view.volts(cell.block, _time(cell, float(place))))
    return wanted, np.asarray(rows) @ stage.unit


def _time(cell: Cell, place: float) -> float:
    high = cell.bottom - cell.top
    share = (place - cell.top) / high if high > 0 else 0.0
    return cell.start_s + (cell.end_s - cell.start_s) * min(1.0, max(0.0, share))


def _track(axes: Any, axis: Score, number: int, track: Track) -> None:
    z_mm: list[float] = []
    places: list[float] = []
    for run in track.runs():
        for stay in run:
            ends = (stay.from_m, stay.to_m)
            if stay.from_ground:
                ends = ((stay.from_m + stay.to_m) / 2,) * 2
            z_mm += [end * 1e3 for end in ends]
            places += _ends(stay, axis)
        z_mm.append(np.nan)
        places.append(np.nan)
    colour, _ = cloud_look(number)
    axes.plot(
        z_mm,
        places,
        color=LIGHT[colour],
        linewidth=1.4,
        dashes=_dashes(number) or (None, None),
        label=f"{cut(track.name, 24)} ({'+' if track.sign > 0 else '−'})",
    )


def _ends(stay: Stay, axis: Score) -> list[float]:
    return [
        float(axis.after(stay.block, stay.start_s)),
        float(axis.before(stay.block, stay.end_s)),
    ]


def _dashes(number: int) -> tuple[float, ...]:
    """The dash of a cloud's line in units of the line's width."""
    return tuple(float(part) for part in DASHES[number % len(DASHES)].split())


def _depth_ticks(axes: Any) -> None:
    """Decades of depth (V) that lie within what is drawn."""
    low, high = axes.get_ylim()
    values = [0.0, *(10.0**power for power in range(-2, 6))]
    inside = [
        value for value in values if low <= value <= high and not 0 < value < 0.5 * DEPTH_SOFT_V
    ]
    axes.set_yticks(inside, [amount(value, "V") for value in inside])
    axes.minorticks_off()


def _part_ticks(axes_axis: Any, axis: Score, **look: Any) -> None:
    """A tick with its label where each part begins, as many as can be read."""
    parts = axis.parts
    if len(parts) > TICKS_MOST:
        parts = tuple(parts[at * len(parts) // TICKS_MOST] for at in range(TICKS_MOST))
    apart = [part for part in parts if part.bottom - part.top > WHOLE / 60] or list(parts)
    axes_axis.set_ticks(
        [part.top for part in apart], [cut(part_name(part), 24) for part in apart], **look
    )


def _cloud(view: View, stage: Stage, axis: Score, number: int, track: Track) -> Figure:
    """Place above, depths with certificate and limit below, over the steps."""
    figure = _figure(7.0, 4.6)
    above, below = figure.subplots(2, 1, sharex=True, height_ratios=(1, 1.5))
    colour = LIGHT[cloud_look(number)[0]]
    for at, run in enumerate(track.runs()):
        places = [end for stay in run for end in _ends(stay, axis)]
        z_mm = [end * 1e3 for stay in run for end in (stay.from_m, stay.to_m)]
        if run[0].from_ground:
            above.fill_between(places, z_mm[0], z_mm[1], color=colour, alpha=0.25, linewidth=0)
        else:
            above.plot(places, z_mm, color=colour, linewidth=1.3)
        _depths(below, places, run, colour, named=not at)
    _foretold(below, view, track, axis)
    above.set_ylabel("place / mm")
    above.set_title(f"{cut(track.name, 40)}: {cut(track.species, 40)}", loc="left", size=9)
    below.set_yscale("asinh", linear_width=DEPTH_SOFT_V)
    below.set_ylabel("own depth of the well")
    _depth_ticks(below)
    below.set_xlim(0, WHOLE)
    below.margins(y=0.08)
    _part_ticks(below.xaxis, axis, rotation=35, ha="right", rotation_mode="anchor")
    for axes in (above, below):
        axes.grid(axis="x", color=LIGHT["hair"], linewidth=0.4)
    if track.stays:
        below.legend(loc="best", frameon=True, fontsize=7)
    return figure


def _depths(axes: Any, places: list[float], run: list[Stay], colour: str, *, named: bool) -> None:
    """Depths of one unbroken run over its places; `named` once, for the legend."""

    def twice(values: list[float]) -> list[float]:
        return [value for value in values for _ in range(2)]

    def said(words: str) -> str:
        return words if named else "_"

    lesser = [stay.lesser for stay in run]
    axes.fill_between(
        places,
        twice([side.certified_V for side in lesser]),
        twice([side.evaluated_V for side in lesser]),
        color=colour,
        alpha=0.3,
        linewidth=0,
        label=said("certified to evaluated"),
    )
    left, right = ([stay.left for stay in run], [stay.right for stay in run])
    for sides, dashes, words in ((left, (None, None), "left"), (right, (1.5, 1.5), "right")):
        axes.plot(
            places,
            twice([side.certified_V for side in sides]),
            color=colour,
            linewidth=1.2,
            dashes=dashes,
            label=said(f"certified, {words}"),
        )
    limit = twice([side.limit_V for side in lesser])
    axes.plot(places, limit, color=LIGHT["ink"], linewidth=0.9, dashes=(6, 3), label=said("limit"))


def _foretold(axes: Any, view: View, track: Track, axis: Score) -> None:
    """What space charge is forecast to leave of the depth, each with its interval."""
    found = [
        (float(axis.before(told.block, told.end_s)), figure)
        for told in view.told
        if told.cloud == track.name and (figure := told.figure("depth_left")) is not None
    ]
    if found:
        axes.vlines(
            [place for place, _ in found],
            [figure.low for _, figure in found],
            [figure.high for _, figure in found],
            color=LIGHT["ink"],
            linewidth=1.6,
            label="forecast, space charge taken off",
        )

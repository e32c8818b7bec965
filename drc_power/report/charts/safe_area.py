"""The safe-area chart: log-log, dark on white, told apart by dashes, weights and marks before colour.

Thin lines are the data sheet's, with the case at 25 °C; heavy ones the same at the actual case. An event is a path
with its start ringed and its deciding point marked; a mode is a filled mark. What does not hold is crossed out.
"""

from __future__ import annotations

import io

import numpy as np

from ...findings.charts import AreaLine, AreaPath, SafeAreaChart
from ...text import printable, si

INK, SOFT, ACCENT = "#16202c", "#8a94a0", "#8c2f1b"
"""Ink and a soft grey for what is given, one dark red for what is asked: apart in grey by weight and mark as well."""

DASHES = ((None, None), (7, 2), (4, 2), (7, 2, 1.5, 2), (1.5, 1.5), (9, 2, 1.5, 2, 1.5, 2))
MARKS = ("o", "s", "^", "D", "v", "P", "h")
FORMATS = ("svg", "png")
FLOOR_DECADES = 4.5
FAILS = ("exceeded", "unproven")


def draw(chart: SafeAreaChart, file_format: str) -> bytes:
    """The chart as SVG or PNG; the same chart gives the same bytes."""
    import matplotlib

    matplotlib.use("Agg")
    style = {"svg.hashsalt": "drc-power", "font.size": 9, "font.family": "DejaVu Sans", "axes.edgecolor": INK, "text.color": INK,
             "axes.labelcolor": INK, "xtick.color": INK, "ytick.color": INK, "axes.linewidth": 0.8}
    with matplotlib.rc_context(style):
        figure = _figure(chart)
        target = io.BytesIO()
        quiet = {"Date": None, "Creator": None} if file_format == "svg" else {"Software": None}
        figure.savefig(target, format=file_format, metadata=quiet, dpi=160, facecolor="white")
    return target.getvalue()


def _figure(chart: SafeAreaChart):
    from matplotlib.figure import Figure

    figure = Figure(figsize=(10.2, 6.2))
    axes = figure.add_axes((0.07, 0.1, 0.6, 0.78))
    _frame(axes, chart)
    for k, (line, hot) in enumerate(zip(chart.drawn, chart.hot, strict=True)):
        dashes = DASHES[k % len(DASHES)]
        _line(axes, line, dashes, SOFT, 0.9)
        _line(axes, hot, dashes, INK, 1.7)
        _length_label(axes, line, k)
    _on_line(axes, chart)
    handles = [_mode(axes, point, k) for k, point in enumerate(chart.points)]
    handles += [_event(axes, path, k) for k, path in enumerate(chart.paths)]
    _legend(figure, chart, [h for h in handles if h is not None])
    return figure


def _frame(axes, chart: SafeAreaChart) -> None:
    volts = np.concatenate([line.voltage_v for line in chart.drawn])
    tops = [line.current_a.max() for line in chart.drawn]
    asked = [p.current_a for p in chart.points if p.current_a > 0.0] + [p.decides_a for p in chart.paths if p.decides_a > 0.0]
    top = 2.0 * max(*tops, *asked, 0.0)
    lows = [line.current_a[line.current_a > 0.0].min() for line in chart.hot if (line.current_a > 0.0).any()]
    bottom = max(min([*lows, *asked]) / 2.5, top / 10.0**FLOOR_DECADES)
    at = [v for v in (p.voltage_v for p in chart.points) if v > 0.0]
    axes.set(xscale="log", yscale="log", xlim=(max(min([volts.min(), *at]) / 1.5, volts.max() / 1e4), volts.max() * 2.6), ylim=(bottom, top))
    axes.set_xlabel("voltage across the part, V")
    axes.set_ylabel("current, A")
    axes.xaxis.set_major_formatter("{x:g}")
    axes.yaxis.set_major_formatter("{x:g}")
    axes.grid(True, which="major", color="#d5dae0", linewidth=0.6)
    axes.grid(True, which="minor", color="#edf0f3", linewidth=0.4)
    axes.set_axisbelow(True)
    axes.set_title(f"{printable(chart.ref)}, {printable(chart.device)}", loc="left", fontsize=13, fontweight="bold", pad=22)
    axes.text(0.0, 1.02, f"Safe operating area on {printable(chart.board)}", transform=axes.transAxes, fontsize=9)


def _line(axes, line: AreaLine, dashes, colour: str, width: float) -> None:
    # Left of its first point a line goes on level.
    volts, amperes = np.append(axes.get_xlim()[0], line.voltage_v), np.append(line.current_a[0], line.current_a)
    drawn = axes.plot(volts, np.where(amperes > 0.0, amperes, np.nan), color=colour, linewidth=width,
                      solid_capstyle="butt")[0]
    if dashes[0] is not None:
        drawn.set_dashes(dashes)
    if (line.current_a > 0.0).any():
        last = np.flatnonzero(line.current_a > 0.0)[-1]
        axes.plot([line.voltage_v[last]] * 2, [line.current_a[last], axes.get_ylim()[0]], color=colour, linewidth=width * 0.6)


def _length_label(axes, line: AreaLine, k: int) -> None:
    """The pulse length, where the line ends on the right."""
    positive = np.flatnonzero(line.current_a > 0.0)
    if positive.size:
        at = positive[-1]
        text = "any length" if line.length_s is None else si(line.length_s, "s", 3)
        axes.annotate(text, (line.voltage_v[at], line.current_a[at]), xytext=(4, 0), textcoords="offset points", fontsize=8,
                      va="center", clip_on=False)


def _on_line(axes, chart: SafeAreaChart) -> None:
    """What the channel lets through fully on: shown, not judged."""
    if chart.on_ohm is None or chart.on_ohm <= 0.0:
        return
    volts = np.geomspace(*axes.get_xlim(), 50)
    axes.plot(volts, volts / chart.on_ohm, color=SOFT, linewidth=0.9, linestyle=(0, (1, 2)))
    low, high = axes.get_ylim()
    at = np.sqrt(max(low * chart.on_ohm, axes.get_xlim()[0]) * max(high * chart.on_ohm, axes.get_xlim()[0]))
    axes.annotate("on-resistance, hot", (at, at / chart.on_ohm), fontsize=7.5, color="#5d6874", xytext=(-3, 3),
                  textcoords="offset points", ha="right")


def _mode(axes, point, k: int):
    if not (point.current_a > 0.0 and point.voltage_v > 0.0):
        return None
    failing = point.verdict in FAILS
    face = "white" if failing else INK
    mark = axes.plot([point.voltage_v], [point.current_a], MARKS[k % len(MARKS)], color=INK, markerfacecolor=face, markersize=6,
                     linestyle="none", zorder=5, label=f"mode {printable(point.mode)}: {point.verdict}")[0]
    if failing:
        _cross(axes, point.voltage_v, point.current_a)
    return mark


def _event(axes, path: AreaPath, k: int):
    if not len(path.voltage_v):
        return None
    low_v, low_a = axes.get_xlim()[0], axes.get_ylim()[0]
    volts, amperes = np.maximum(path.voltage_v, low_v), np.maximum(path.current_a, low_a)
    axes.plot(volts, amperes, color=ACCENT, linewidth=2.0, zorder=4)
    axes.plot(volts[:1], amperes[:1], "o", markersize=8, markerfacecolor="none", color=ACCENT, zorder=4)
    used = f", {100 * path.decides_a / path.rated_a:.0f} % used" if path.rated_a else ""
    mark = axes.plot([path.decides_v], [max(path.decides_a, low_a)], MARKS[-1 - k % len(MARKS)], color=ACCENT, markersize=7, linestyle="none",
                     zorder=6, label=f"{printable(path.event)}, {printable(path.mode)}: {path.verdict}{used}")[0]
    if path.rated_a:
        axes.plot([path.decides_v] * 2, [max(path.decides_a, low_a), min(max(path.rated_a, low_a), axes.get_ylim()[1])], color=ACCENT,
                  linewidth=0.8, linestyle=(0, (2, 2)), zorder=3)
        axes.plot([path.decides_v], [path.rated_a], "_", color=ACCENT, markersize=12, markeredgewidth=1.8, zorder=6)
    if path.verdict in FAILS:
        _cross(axes, path.decides_v, max(path.decides_a, low_a))
    return mark


def _cross(axes, volt: float, ampere: float) -> None:
    axes.plot([volt], [ampere], "x", color=INK, markersize=13, markeredgewidth=1.8, zorder=7)


def _legend(figure, chart: SafeAreaChart, handles) -> None:
    """How to read the lines, then what is asked of the part."""
    from matplotlib.lines import Line2D

    hot_c = chart.hot[0].case_c if chart.hot else 25.0
    lines = [Line2D([], [], color=SOFT, linewidth=0.9, label="case at 25 °C, as drawn"),
             Line2D([], [], color=INK, linewidth=1.7, label=f"case at {hot_c:.0f} °C, the hottest here"),
             Line2D([], [], color=ACCENT, linewidth=2.0, label="path of an event, its start ringed"),
             Line2D([], [], color=ACCENT, marker="_", markersize=12, linestyle="none", markeredgewidth=1.8,
                    label="what the deciding window allows"),
             Line2D([], [], color=INK, marker="x", markersize=9, linestyle="none", markeredgewidth=1.8, label="does not hold, or not shown to")]
    for top, title, rows in ((0.885, "Lines", lines), (0.62, "On this board", handles)):
        if rows:
            figure.legend(handles=rows, loc="upper left", bbox_to_anchor=(0.685, top), frameon=False, fontsize=7.5, title=title,
                          title_fontsize=9, alignment="left", handlelength=2.0)

"""Tables of data sheets: straight lines between points, with what happens beyond the ends said out loud.

| symbol | meaning |
|---|---|
| x | where the table is read |
| xs, ys | the points of the table, xs rising |
| below, above | beyond the first and last point: "hold" the value, "extend" the slope, or "nan" |
"""

from __future__ import annotations

import numpy as np

from drc_power.physics.range import OutsideRange, nan_where, refuse_unless

BEYOND = ("hold", "extend", "nan")


def interpolate_linear(x, xs, ys, *, below="hold", above="extend"):
    """Straight lines between the points of a table: y = y_k + (y_k+1 − y_k)/(x_k+1 − x_k) · (x − x_k).

    x: where to read [any], any shape.
    xs: abscissae, strictly rising [any], shape (point,).
    ys: ordinates [any], shape (point,).
    below: before the first point "hold", "extend" or "nan" [word].
    above: after the last point "hold", "extend" or "nan" [word]; a table of one point is level.
    Returns y [any], shape of x, exactly y_k at x_k; NaN where x is NaN.
    Raises OutsideRange for a table that does not rise.
    Source: formats contract, device data: straight lines, on along the last slope, first value held.

    >>> round(float(interpolate_linear(175.0, [25.0, 100.0, 150.0], [1.0, 1.45, 1.85])), 6)
    2.05
    """
    return interpolate_linear_slope(x, xs, ys, below=below, above=above)[0]


def interpolate_linear_slope(x, xs, ys, *, below="hold", above="extend"):
    """The value of a table and its slope dy/dx, which at a breakpoint is that of the line to its right.

    x: where to read [any], any shape.
    xs: abscissae, strictly rising [any], shape (point,).
    ys: ordinates [any], shape (point,).
    below: before the first point "hold", "extend" or "nan" [word].
    above: after the last point "hold", "extend" or "nan" [word]; a table of one point is level.
    Returns (y, dy/dx) [any], each the shape of x. At the last point the slope is 0 under "hold", that of
    the last line under "extend" and "nan"; where a value is held the slope is 0.
    Raises OutsideRange for a table that does not rise.
    Source: formats contract, device data.

    >>> value, slope = interpolate_linear_slope(100.0, [25.0, 100.0, 150.0], [1.0, 1.45, 1.85])
    >>> float(value), round(float(slope), 6)
    (1.45, 0.008)
    """
    return StraightLines(xs, ys, below=below, above=above).read(x)


class StraightLines:
    """A table checked once and read many times: `read(x)` is `interpolate_linear_slope(x, xs, ys, ...)`.

    >>> value, slope = StraightLines([25.0, 100.0, 150.0], [1.0, 1.45, 1.85]).read(100.0)
    >>> float(value), round(float(slope), 6)
    (1.45, 0.008)
    """

    def __init__(self, xs, ys, *, below="hold", above="extend"):
        self.xs, self.ys = _checked(xs, ys, below, above)
        self.below, self.above = below, above
        slopes = np.diff(self.ys) / np.diff(self.xs) if self.xs.size > 1 else np.zeros(1)
        before, after = 0.0 if below == "hold" else slopes[0], 0.0 if above == "hold" else slopes[-1]
        # Line k starts at point k − 1: the first lies before the table, the last after it.
        self.slopes = np.concatenate([[before], slopes[: self.xs.size - 1], [after]])
        self.anchors = np.concatenate([[0], np.arange(self.xs.size)])

    def read(self, x):
        """Value and slope at x, each of its shape."""
        x = np.asarray(x, dtype=float)
        line = np.searchsorted(self.xs, x, side="right")
        anchor, slope = self.anchors[line], self.slopes[line]
        # A held value must not see x itself: 0 · infinity is NaN.
        value = self.ys[anchor] + slope * np.where(slope == 0.0, 0.0, x - self.xs[anchor])
        outside = np.isnan(x)
        if self.below == "nan":
            outside = outside | (x < self.xs[0])
        if self.above == "nan":
            outside = outside | (x > self.xs[-1])
        return (nan_where(outside, value), nan_where(outside, slope)) if outside.any() else (value, slope)


def interpolate_bilinear(x, y, rows, *, x_outside="hold", y_below="hold", y_above="hold"):
    """A family of tables: linear in y along each row's own table, then linear in x between rows.

    x: which row, for instance the input voltage [any], any shape.
    y: where to read the rows, for instance the load current [any], broadcasts with x.
    rows: pairs (x of the row, (ys, zs)), x rising; rows may have different points [any].
    x_outside: beyond the first and last row "hold", "extend" or "nan" [word]; one row serves every x.
    y_below: before a row's first point "hold", "extend" or "nan" [word].
    y_above: after a row's last point "hold", "extend" or "nan" [word].
    Returns z [any], the common shape of x and y.
    Raises OutsideRange for rows or tables that do not rise.
    Source: formats contract, efficiency over input voltage and load.

    >>> rows = [(24.0, ([0.1, 1.0], [0.80, 0.90])), (48.0, ([0.1, 1.0], [0.70, 0.86]))]
    >>> round(float(interpolate_bilinear(36.0, 1.0, rows)), 6)
    0.88
    """
    x, y = np.broadcast_arrays(np.asarray(x, dtype=float), np.asarray(y, dtype=float))
    at_rows = np.array([row_x for row_x, _ in rows], dtype=float)
    read = np.array([interpolate_linear(y, *table, below=y_below, above=y_above) for _, table in rows])
    if at_rows.size == 1:
        return np.where(np.isnan(x), np.nan, read[0])[()]
    position = interpolate_linear(x, at_rows, np.arange(at_rows.size), below=x_outside, above=x_outside)
    lower = np.clip(np.nan_to_num(np.floor(position)), 0, at_rows.size - 2).astype(int)
    share = position - lower
    low, high = (np.take_along_axis(read, (lower + step)[np.newaxis], axis=0)[0] for step in (0, 1))
    # At a row exactly, the neighbour's NaN must not spoil the answer.
    blend = (1.0 - share) * np.where(share == 1.0, 0.0, low) + share * np.where(share == 0.0, 0.0, high)
    return blend[()]


def _checked(xs, ys, below, above):
    xs, ys = np.asarray(xs, dtype=float), np.asarray(ys, dtype=float)
    if below not in BEYOND or above not in BEYOND:
        raise OutsideRange(f"beyond a table's ends one of {', '.join(BEYOND)}, not {below} and {above}")
    refuse_unless(xs.ndim == 1 and xs.shape == ys.shape and xs.size, "a table needs as many ordinates as abscissae")
    refuse_unless(np.all(np.isfinite(xs)) and np.all(np.isfinite(ys)), "a table holds finite numbers only")
    refuse_unless(np.diff(xs) > 0, "the first numbers of a table must rise from point to point")
    return xs, ys

"""Heat spreading from a small source into a base plate that air cools from behind.

| symbol | name here | unit | meaning |
|---|---|---|---|
| A_s, A_p | source_m2, base_m2 | m² | footprint of the device; area of the base |
| t, k | thickness_m, k_w_per_m_k | m, W/(m·K) | thickness and conductivity of the base |
| R_0 | r_outside_k_per_w | K/W | mean resistance from the base's far side to the air |

`spreading_rth_k_per_w` is the closed form for a source in the middle; `placed_rise_k_per_w` the exact series
for rectangles anywhere, which several devices on one base need. The first gives the hottest point under a
source, the second any mean or point; the mean over a source lies some 20 % of the spreading lower.
"""

from __future__ import annotations

import numpy as np

from drc_power.physics.range import refuse_unless

N_MODES = 120
"""Modes in each direction of the series: sources down to a fortieth of the base within 1 %."""


def spreading_rth_k_per_w(source_m2, base_m2, thickness_m, k_w_per_m_k, r_outside_k_per_w):
    """Spreading resistance to the middle of a centred source, its hottest point, to be added to R_0.

    λ = π^1.5/√A_p + 1/√A_s,
    R = (√A_p − √A_s)/(k · √(π · A_p · A_s)) · (λ · k · A_p · R_0 + tanh λt)/(1 + λ · k · A_p · R_0 · tanh λt).

    source_m2: area of the source, up to the base [m2].
    base_m2: area of the base [m2].
    thickness_m: thickness of the base [m].
    k_w_per_m_k: conductivity of the base [W/(m.K)].
    r_outside_k_per_w: mean resistance from the base to the air [K/W].
    Returns the resistance [K/W], 0 for a source as large as the base. Within some per cent of the exact series
    for sources and bases that are not far from square.
    Raises OutsideRange for a source larger than the base.
    Source: Lee, Song, Au and Moran, ASME/JSME Thermal Engineering Conference 1995; Lee 1998 (from memory).

    >>> round(float(spreading_rth_k_per_w(625e-6, 0.01, 1.3e-3, 200.0, 1.0)), 4)
    0.6566
    """
    refuse_unless(np.less_equal(source_m2, base_m2) & np.greater(source_m2, 0.0), "a source must fit on its base")
    source_root_m, base_root_m = np.sqrt(source_m2), np.sqrt(base_m2)
    per_m = np.pi**1.5 / base_root_m + 1.0 / source_root_m
    outside, depth = per_m * k_w_per_m_k * base_m2 * r_outside_k_per_w, np.tanh(per_m * thickness_m)
    narrowing = (base_root_m - source_root_m) / (k_w_per_m_k * np.sqrt(np.pi) * base_root_m * source_root_m)
    return narrowing * (outside + depth) / (1.0 + outside * depth)


def placed_rise_k_per_w(at_m, source_m, base_m, thickness_m, k_w_per_m_k, h_w_per_m2_k, n_modes=N_MODES):
    """Mean rise over the air of one rectangle on a base per watt in another, exactly: a double cosine series.

    at_m: rectangle whose mean rise is asked: centre x and y, width, height; a point has neither [m].
    source_m: rectangle that the heat enters, likewise [m].
    base_m: width and height of the base, its corner at the origin [m].
    thickness_m: thickness of the base [m].
    k_w_per_m_k: conductivity of the base [W/(m.K)].
    h_w_per_m2_k: coefficient on the far side, of fins per base area; the other faces are adiabatic [W/(m2.K)].
    n_modes: modes in each direction [-].
    Returns the rise per watt [K/W], symmetric in the two rectangles.
    Raises OutsideRange for a rectangle that leaves the base.
    Source: Y. S. Muzychka, J. R. Culham and M. M. Yovanovich, J. Electronic Packaging 125, 2003 (from memory);
    separation of variables.

    >>> middle = (0.05, 0.05, 0.025, 0.025)
    >>> round(float(placed_rise_k_per_w(middle, middle, (0.1, 0.1), 1.3e-3, 200.0, 100.0)), 3)
    1.527
    """
    for x, y, width, height in (at_m, source_m):
        inside = abs(x - base_m[0] / 2) + width / 2 <= base_m[0] / 2 * (1 + 1e-9)
        inside &= abs(y - base_m[1] / 2) + height / 2 <= base_m[1] / 2 * (1 + 1e-9)
        refuse_unless(inside, "a device must lie within its base")
    along, across = (_mode_means((at_m, source_m), base_m, axis, n_modes) for axis in (0, 1))
    n = np.arange(n_modes)
    wave_per_m = np.pi * np.hypot(n[:, np.newaxis] / base_m[0], n / base_m[1])
    depth = np.tanh(wave_per_m * thickness_m)
    conducted = k_w_per_m_k * wave_per_m
    # The uniform mode is the slab in series with the far side; the others see both through tanh.
    with np.errstate(divide="ignore", invalid="ignore"):
        modes = (conducted + h_w_per_m2_k * depth) / (conducted * (conducted * depth + h_w_per_m2_k))
    modes[0, 0] = thickness_m / k_w_per_m_k + 1.0 / h_w_per_m2_k
    return along @ modes @ across / (base_m[0] * base_m[1])


def _mode_means(rectangles_m, base_m, axis, n_modes):
    """Product of the two rectangles' means of each cosine along one axis, with the weight of the mode."""
    n = np.arange(n_modes)
    product = np.where(n == 0, 1.0, 2.0)
    for rectangle_m in rectangles_m:
        centre, half = rectangle_m[axis] / base_m[axis], rectangle_m[axis + 2] / base_m[axis] / 2
        product = product * np.cos(n * np.pi * centre) * np.sinc(n * half)
    return product

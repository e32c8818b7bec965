"""Steady heat: chains and networks of thermal resistance, and the loop of loss and temperature.

| symbol | name here | unit | meaning |
|---|---|---|---|
| R_th | rth_k_per_w | K/W | thermal resistance; a matrix where parts heat each other |
| G | conductance_w_per_k | W/K | thermal conductance matrix of a network of nodes |
| b | p_25_w | W | loss at 25 °C of what grows with temperature, for instance I² · R_25 |
| a | tempco_per_k | 1/K | linear growth of that loss |

Shapes: corners or samples first, parts or nodes last.
"""

from __future__ import annotations

import numpy as np

from drc_power.physics.range import nan_where, refuse_unless
from drc_power.physics.tables import interpolate_linear_slope


def junction_c(t_reference_c, p_w, rth_k_per_w):
    """Junction temperature of one part by itself: T_j = T_ref + R_th · P.

    t_reference_c: ambient or case, whichever the resistance starts from [°C], shape (corner,).
    p_w: loss of the part [W], shape (corner,).
    rth_k_per_w: thermal resistance, junction to reference [K/W], shape (corner,).
    Returns the junction temperature [°C], shape (corner,).
    Source: definition of thermal resistance, JEDEC JESD51-1.

    >>> junction_c(55.0, 2.0, 40.0)
    135.0
    """
    return t_reference_c + rth_k_per_w * p_w


def allowed_power_w(tj_max_c, t_reference_c, rth_k_per_w):
    """Loss that just heats the junction to its limit: P = (T_j,max − T_ref)/R_th.

    tj_max_c: limit of the junction temperature [°C].
    t_reference_c: ambient or case, whichever the resistance starts from [°C], shape (corner,).
    rth_k_per_w: thermal resistance, junction to reference, above 0 [K/W].
    Returns the loss [W], shape (corner,); negative for a reference above the limit, where nothing is allowed.
    Source: definition of thermal resistance, JEDEC JESD51-1.

    >>> float(allowed_power_w(150.0, 25.0, 1.0))
    125.0
    """
    return np.subtract(tj_max_c, t_reference_c) / rth_k_per_w


def slab_rth_k_per_w(thickness_m, k_w_per_m_k, area_m2, contact_m2_k_per_w=0.0):
    """Resistance through a pad, foil or spacer: R_th = thickness/(k · A) + contact/A.

    thickness_m: thickness as mounted [m].
    k_w_per_m_k: thermal conductivity, above 0 [W/(m.K)].
    area_m2: area that the heat crosses, above 0 [m2].
    contact_m2_k_per_w: what both faces add, per area [m2.K/W]; 0 takes them as perfect.
    Returns the thermal resistance [K/W]. Valid for heat that goes straight through.
    Source: Fourier's law; Rashid, Power Electronics, 4th edition, example 17.2.

    >>> round(slab_rth_k_per_w(0.3e-3, 1.1, 1e-4), 3)
    2.727
    """
    return (thickness_m / k_w_per_m_k + contact_m2_k_per_w) / area_m2


def conductance_matrix_w_per_k(n_nodes, links, to_ambient_w_per_k):
    """Conductance matrix of a thermal network: G_ii = sum of all conductances at node i, G_ij = −g_ij.

    n_nodes: number of nodes, ambient not counted [-].
    links: triples (node [-], node [-], conductance above 0 [W/K]), nodes counted from 0.
    to_ambient_w_per_k: conductance from each node to ambient, 0 for none [W/K], shape (node,).
    Returns the matrix [W/K], shape (node, node), symmetric.
    Raises OutsideRange for a negative or infinite conductance.
    Source: Kirchhoff's current law with heat for current.

    >>> conductance_matrix_w_per_k(2, [(0, 1, 2.0)], [0.0, 0.5]).tolist()
    [[2.0, -2.0], [-2.0, 2.5]]
    """
    matrix_w_per_k = np.diag(np.broadcast_to(np.asarray(to_ambient_w_per_k, dtype=float), (n_nodes,)).copy())
    refuse_unless(np.diag(matrix_w_per_k) >= 0, "a conductance to ambient must not be negative")
    for one, other, link_w_per_k in links:
        refuse_unless(0.0 < link_w_per_k < np.inf, "a conductance between nodes must be above 0 W/K and finite")
        matrix_w_per_k[[one, other], [one, other]] += link_w_per_k
        matrix_w_per_k[[one, other], [other, one]] -= link_w_per_k
    return matrix_w_per_k


def network_temperatures_c(conductance_w_per_k, p_w, t_ambient_c):
    """Temperatures of the nodes of a network: G · (T − T_a) = P.

    conductance_w_per_k: conductance matrix [W/K], shape (node, node) or (corner, node, node).
    p_w: heat put in at each node [W], shape (node,) or (corner, node).
    t_ambient_c: ambient temperature [°C], shape () or (corner,).
    Returns the temperatures [°C], shape (node,) or (corner, node); what goes in comes out at ambient.
    Raises OutsideRange for a node without a path to ambient.
    Source: Kirchhoff's current law with heat for current.

    >>> g = conductance_matrix_w_per_k(2, [(0, 1, 2.0)], [0.0, 0.5])
    >>> network_temperatures_c(g, [4.0, 0.0], 25.0).round(6).tolist()
    [35.0, 33.0]
    """
    refuse_unless(_reaches_ambient(np.asarray(conductance_w_per_k)), "a node has no path to ambient for its heat")
    rise_k = np.linalg.solve(conductance_w_per_k, np.asarray(p_w, dtype=float)[..., np.newaxis])[..., 0]
    return np.asarray(t_ambient_c, dtype=float)[..., np.newaxis] + rise_k


def resistance_matrix_k_per_w(conductance_w_per_k, nodes):
    """How much each of some nodes is heated by a watt in each other: the rows and columns of G⁻¹.

    conductance_w_per_k: conductance matrix [W/K], shape (node, node).
    nodes: the nodes of interest, for instance the junctions, counted from 0 [-], shape (part,).
    Returns the resistance matrix to ambient [K/W], shape (part, part), symmetric.
    Raises OutsideRange for a node without a path to ambient.
    Source: reciprocity of a linear passive network.

    >>> g = conductance_matrix_w_per_k(2, [(0, 1, 2.0)], [0.0, 0.5])
    >>> resistance_matrix_k_per_w(g, [0, 1]).round(6).tolist()
    [[2.5, 2.0], [2.0, 2.0]]
    """
    refuse_unless(_reaches_ambient(np.asarray(conductance_w_per_k)), "a node has no path to ambient for its heat")
    unit_w = np.eye(len(conductance_w_per_k))[:, nodes]
    return np.linalg.solve(conductance_w_per_k, unit_w)[nodes]


def steady_temperatures_c(rth_k_per_w, p_w, t_ambient_c):
    """Temperatures of parts that heat each other: T_i = T_a + Σ_j R_ij · P_j.

    rth_k_per_w: resistance matrix to ambient [K/W], shape (part, part) or (corner, part, part); a plain
        junction-to-ambient figure per part is its diagonal, `numpy.diag`.
    p_w: loss of each part [W], shape (part,) or (corner, part).
    t_ambient_c: ambient temperature [°C], shape () or (corner,).
    Returns the temperatures [°C], shape (part,) or (corner, part).
    Source: superposition in a linear network.

    >>> steady_temperatures_c([[30.0, 5.0], [5.0, 50.0]], [2.0, 1.0], 40.0).tolist()
    [105.0, 100.0]
    """
    rise_k = np.einsum("...ij,...j->...i", np.asarray(rth_k_per_w, dtype=float), np.asarray(p_w, dtype=float))
    return np.asarray(t_ambient_c, dtype=float)[..., np.newaxis] + rise_k


def linear_loop_gain(p_25_w, tempco_per_k, rth_k_per_w):
    """Gain of the loop from temperature to loss to temperature: g = b · a · R_th; runaway at 1 and above.

    p_25_w: loss at 25 °C of what grows with temperature [W], shape (corner,).
    tempco_per_k: linear growth of that loss [1/K].
    rth_k_per_w: thermal resistance, junction to ambient [K/W].
    Returns the loop gain [-], shape (corner,).
    Source: algebra of P = b · (1 + a · (T_j − 25 °C)) and T_j = T_a + R_th · P.

    >>> round(linear_loop_gain(20.0**2 * 0.004, 0.005, 40.0), 6)
    0.32
    """
    return p_25_w * tempco_per_k * rth_k_per_w


def linear_equilibrium_w(p_25_w, tempco_per_k, rth_k_per_w, t_ambient_c):
    """Loss where it and the temperature agree: P = b · (1 + a · (T_a − 25 °C))/(1 − b · a · R_th).

    p_25_w: loss at 25 °C of what grows with temperature [W], shape (corner,).
    tempco_per_k: linear growth of that loss [1/K].
    rth_k_per_w: thermal resistance, junction to ambient [K/W].
    t_ambient_c: ambient temperature [°C], shape (corner,).
    Returns the loss [W], shape (corner,); NaN where the loop gain is 1 or more and there is no equilibrium.
    Source: algebra, as `linear_loop_gain`.

    >>> round(float(linear_equilibrium_w(20.0**2 * 0.004, 0.005, 40.0, 50.0)), 4)
    2.6471
    """
    gain = np.asarray(linear_loop_gain(p_25_w, tempco_per_k, rth_k_per_w), dtype=float)
    runaway = ~(gain < 1.0)
    return nan_where(
        runaway, p_25_w * (1.0 + tempco_per_k * np.subtract(t_ambient_c, 25.0)) / np.where(runaway, 1.0, 1.0 - gain)
    )


def equilibrium_c(t_ambient_c, rth_k_per_w, p_fixed_w, p_25_w, scale_temperatures_c, scales):
    """Junction temperature of one part whose loss follows a data sheet's curve, solved line by line exactly.

    T_j = T_a + R_th · (P_fixed + P_25 · scale(T_j)); of several solutions the lowest, which is the one that
    a part warming up from ambient comes to rest at.

    t_ambient_c: ambient temperature [°C], shape (corner,).
    rth_k_per_w: thermal resistance, junction to ambient [K/W], shape (corner,).
    p_fixed_w: loss that does not follow temperature, and heat from neighbours [W], shape (corner,).
    p_25_w: loss at 25 °C of what follows the curve, not below 0 [W], shape (corner,).
    scale_temperatures_c: abscissae of the curve, rising [°C], shape (point,).
    scales: ordinates, held below the first point and extended past the last [-], shape (point,).
    Returns (T_j [°C], loop gain R_th · P_25 · dscale/dT [-]), each of shape (corner,). Where no equilibrium
    exists T_j is NaN and the gain, 1 or more, that of the curve's last line.
    Source: algebra; formats contract, device data, for the curve.

    >>> tj_c, gain = equilibrium_c(50.0, 40.0, 0.0, 1.6, [25.0, 125.0], [1.0, 1.5])
    >>> round(float(tj_c), 3), round(float(gain), 6)
    (155.882, 0.32)
    """
    xs, ys = np.asarray(scale_temperatures_c, dtype=float), np.asarray(scales, dtype=float)
    slopes = np.append(0.0, interpolate_linear_slope(xs[:-1], xs, ys)[1] if xs.size > 1 else [])
    t_ambient_c, rth_k_per_w, p_fixed_w, p_25_w = (
        np.asarray(x, dtype=float)[..., np.newaxis] for x in (t_ambient_c, rth_k_per_w, p_fixed_w, p_25_w)
    )
    # Below the equilibrium the part is cooler than its loss would keep it: the first line that ends above it.
    ends_c = np.append(xs[:-1], np.inf)
    cooler = ends_c - t_ambient_c - rth_k_per_w * (p_fixed_w + p_25_w * np.append(ys[:-1], 0.0)) < 0.0
    line = np.argmin(cooler, axis=-1)[..., np.newaxis]
    anchor, gain = np.maximum(line - 1, 0), rth_k_per_w * p_25_w * slopes[line]
    at_ambient = ys[anchor] + slopes[line] * (t_ambient_c - xs[anchor])
    runaway = ~(gain < 1.0)
    rise_k = rth_k_per_w * (p_fixed_w + p_25_w * at_ambient) / np.where(runaway, 1.0, 1.0 - gain)
    return nan_where(runaway, t_ambient_c + rise_k)[..., 0], gain[..., 0]


def _reaches_ambient(conductance_w_per_k):
    """Whether every node has a path to ambient, itself or through others that have one."""
    diagonal = np.diagonal(conductance_w_per_k, axis1=-2, axis2=-1)
    # What is left of a row's sum after rounding is no path.
    reached = conductance_w_per_k.sum(axis=-1) > 1e-12 * diagonal
    for _ in range(diagonal.shape[-1]):
        onward = reached | np.any((conductance_w_per_k != 0.0) & reached[..., np.newaxis, :], axis=-1)
        if np.array_equal(onward, reached):
            break
        reached = onward
    return reached.all()

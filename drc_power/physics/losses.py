"""Losses of parts that conduct or regulate: channels, diodes, linear and switching regulators, CMOS logic.

| symbol | name here | unit | meaning |
|---|---|---|---|
| I_rms, I_av | i_rms_a, i_mean_a | A | rms and mean current |
| R_DS(on), r_d | rds_on_ohm, slope_ohm | ohm | channel resistance; slope of the forward line |
| V_F0 | knee_v | V | knee of the forward line |
| η | efficiency | - | output power over input power |

Edges and charge that cost energy at every cycle are in `switching.py`, the currents of converters in
`waveforms.py`. Arrays broadcast; the first axis is the corner or sample.
"""

from __future__ import annotations

import numpy as np

from drc_power.physics.range import nan_where
from drc_power.physics.tables import interpolate_bilinear, interpolate_linear


def rds_on_ohm(tj_c, rds_25_ohm, scale_temperatures_c, scales):
    """On-resistance at its junction temperature: R(Tj) = R(25 °C) · scale(Tj), by the data sheet's curve.

    tj_c: junction temperature [°C], shape (corner,).
    rds_25_ohm: on-resistance at 25 °C [ohm], shape (corner,).
    scale_temperatures_c: abscissae of the normalised curve [°C], shape (point,).
    scales: ordinates of the curve, 1 at 25 °C [-], shape (point,).
    Returns the on-resistance [ohm], shape (corner,); the last slope is carried on, the first value held.
    Source: formats contract, device data; the curve is a figure of every MOSFET data sheet.

    >>> round(float(rds_on_ohm(125.0, 8e-3, [25.0, 100.0, 150.0], [1.0, 1.45, 1.85])), 6)
    0.0132
    """
    return rds_25_ohm * interpolate_linear(tj_c, scale_temperatures_c, scales)


def resistance_ohm(t_c, r_reference_ohm, tempco_per_k, t_reference_c=25.0):
    """Resistance with a linear temperature coefficient: R(T) = R_ref · (1 + α · (T − T_ref)).

    t_c: temperature of the conductor [°C], shape (corner,).
    r_reference_ohm: resistance at the reference temperature [ohm], shape (corner,).
    tempco_per_k: temperature coefficient at the reference temperature [1/K].
    t_reference_c: reference temperature [°C].
    Returns the resistance [ohm], shape (corner,).
    Source: Infineon, MOSFET Power Losses Calculation Using the Data-Sheet Parameters, 2006, eq. 3 (linear form).

    >>> round(resistance_ohm(125.0, 0.01, 0.004), 6)
    0.014
    """
    return r_reference_ohm * (1.0 + tempco_per_k * (t_c - t_reference_c))


def resistance_compound_ohm(t_c, r_25_ohm, growth_per_k):
    """Resistance that grows by the same share with every kelvin: R(T) = R(25 °C) · (1 + a)^(T − 25 °C).

    t_c: temperature of the conductor [°C], shape (corner,).
    r_25_ohm: resistance at 25 °C [ohm], shape (corner,).
    growth_per_k: growth per kelvin [1/K]; silicon MOSFETs are near 0.004 to 0.005.
    Returns the resistance [ohm], shape (corner,).
    Source: common practice for R_DS(on) between two points of its curve.

    >>> round(resistance_compound_ohm(125.0, 0.01, 0.005), 6)
    0.016467
    """
    return r_25_ohm * (1.0 + growth_per_k) ** (t_c - 25.0)


def conduction_loss_w(i_rms_a, r_ohm):
    """Loss of a resistive path: P = I_rms² · R.

    i_rms_a: rms current through the path [A], shape (corner,).
    r_ohm: resistance at the path's own temperature [ohm], shape (corner,).
    Returns the mean loss [W], shape (corner,).
    Source: Joule's law; ROHM 64AN035E Rev.002, eq. 1 and 2. 5 A through 80 mohm is 2 W.

    >>> conduction_loss_w(5.0, 0.08)
    2.0
    """
    return i_rms_a * i_rms_a * r_ohm


def diode_forward_v(i_a, knee_v, slope_ohm):
    """Forward line of a diode: V = V_F0 + r_d · I for I > 0.

    i_a: forward current [A], shape (corner,).
    knee_v: forward voltage where the line meets zero current [V].
    slope_ohm: slope of the line [ohm].
    Returns the forward voltage [V], shape (corner,): at no current the knee, the most that it then can be;
    NaN for a reverse current, where the line says nothing.
    Source: formats contract, device data; the straight-line model of every rectifier data sheet.

    >>> round(float(diode_forward_v(10.0, 0.7, 0.004)), 6)
    0.74
    """
    return nan_where(np.less(i_a, 0.0), knee_v + slope_ohm * np.asarray(i_a, dtype=float))


def diode_current_a(v_v, knee_v, slope_ohm):
    """The forward line read backwards: I = (V − V_F0)/r_d above the knee, no current below it.

    v_v: voltage across the diode, anode positive [V], shape (corner,).
    knee_v: forward voltage where the line meets zero current [V].
    slope_ohm: slope of the line, above 0 [ohm].
    Returns the forward current [A], shape (corner,).
    Source: formats contract, device data: no current below the knee.

    >>> round(float(diode_current_a(0.74, 0.7, 0.004)), 6)
    10.0
    """
    return np.maximum(np.subtract(v_v, knee_v) / slope_ohm, 0.0)


def diode_loss_w(i_mean_a, i_rms_a, knee_v, slope_ohm):
    """Loss of a diode that carries a current of any shape: P = V_F0 · I_av + r_d · I_rms².

    i_mean_a: mean forward current [A], shape (corner,).
    i_rms_a: rms forward current, not below the mean [A], shape (corner,).
    knee_v: knee of the forward line [V].
    slope_ohm: slope of the forward line [ohm].
    Returns the mean loss [W], shape (corner,).
    Source: common practice; the mean of V · I with the straight line put in.

    >>> diode_loss_w(2.0, 3.0, 0.5, 0.02)
    1.18
    """
    return knee_v * i_mean_a + slope_ohm * i_rms_a * i_rms_a


def diode_forward_table_v(i_a, t_c, curves, *, t_outside="extend"):
    """Forward voltage from digitised curves: linear in current on each curve, then linear in temperature.

    i_a: forward current [A], shape (corner,); below a curve's first point its voltage is held, which reads
        high; past the last point the last slope goes on.
    t_c: junction temperature [°C], shape (corner,).
    curves: pairs (temperature [°C], (currents [A], voltages [V])), temperatures rising.
    t_outside: beyond the coldest and hottest curve "extend", "hold" or "nan" [word].
    Returns the forward voltage [V], shape (corner,); NaN for a reverse current.
    Source: formats contract, device data, `forward`.

    >>> curves = [(25.0, ([1.0, 10.0], [0.42, 0.60])), (125.0, ([1.0, 10.0], [0.32, 0.54]))]
    >>> round(float(diode_forward_table_v(5.5, 75.0, curves)), 6)
    0.47
    """
    forward_v = interpolate_bilinear(t_c, i_a, curves, x_outside=t_outside, y_below="hold", y_above="extend")
    return nan_where(np.less(i_a, 0.0), forward_v)


def linear_regulator_input_a(i_out_a, i_quiescent_a):
    """Input current of a linear regulator: I_in = I_out + I_q.

    i_out_a: output current [A], shape (corner,).
    i_quiescent_a: current into the ground or adjust pin [A], shape (corner,).
    Returns the input current [A], shape (corner,).
    Source: Kirchhoff's current law; formats contract, device data.

    >>> round(linear_regulator_input_a(0.35, 0.005), 6)
    0.355
    """
    return i_out_a + i_quiescent_a


def linear_regulator_loss_w(v_in_v, v_out_v, i_out_a, i_quiescent_a):
    """Loss of a linear regulator: P = (V_in − V_out) · I_out + V_in · I_q.

    v_in_v: input voltage [V], shape (corner,).
    v_out_v: output voltage, not above the input [V], shape (corner,).
    i_out_a: output current, not below 0 [A], shape (corner,).
    i_quiescent_a: current into the ground or adjust pin [A], shape (corner,).
    Returns the loss [W], shape (corner,); NaN where the output lies above the input or current flows backwards.
    Source: LM317 and LM1117 data sheets, power dissipation; formats contract, device data.

    >>> round(float(linear_regulator_loss_w(12.0, 5.0, 0.35, 0.005)), 6)
    2.51
    """
    loss_w = np.subtract(v_in_v, v_out_v) * i_out_a + np.multiply(v_in_v, i_quiescent_a)
    return nan_where(np.greater(v_out_v, v_in_v) | np.less(i_out_a, 0.0), loss_w)


def switching_regulator_loss_w(p_out_w, efficiency):
    """Loss of a switching regulator: P = P_out · (1/η − 1).

    p_out_w: output power, not below 0 [W], shape (corner,).
    efficiency: output power over input power, above 0 and up to 1 [-], shape (corner,).
    Returns the loss [W], shape (corner,); NaN for an efficiency or power outside its range.
    Source: power balance; formats contract, device data.

    >>> round(float(switching_regulator_loss_w(15.0, 0.86)), 4)
    2.4419
    """
    return switching_regulator_input_w(p_out_w, efficiency) - p_out_w


def switching_regulator_input_w(p_out_w, efficiency):
    """Input power of a switching regulator: P_in = P_out/η.

    p_out_w: output power, not below 0 [W], shape (corner,).
    efficiency: output power over input power, above 0 and up to 1 [-], shape (corner,).
    Returns the input power [W], shape (corner,); NaN for an efficiency or power outside its range.
    Source: power balance; formats contract, device data.

    >>> round(float(switching_regulator_input_w(8.0, 0.8)), 6)
    10.0
    """
    efficiency = np.asarray(efficiency, dtype=float)
    outside = ~((efficiency > 0.0) & (efficiency <= 1.0)) | np.less(p_out_w, 0.0)
    return nan_where(outside, p_out_w / np.where(outside, 1.0, efficiency))


def cmos_loss_w(c_internal_f, c_load_f, v_supply_v, f_input_hz, f_output_hz, n_switching=1.0, i_static_a=0.0):
    """Power of a CMOS circuit: P = C_pd · V² · f_i · N_sw + C_L · V² · f_o + V · I_CC.

    c_internal_f: power-dissipation capacitance C_pd of one gate or bit [F].
    c_load_f: load on all outputs together [F].
    v_supply_v: supply voltage [V], shape (corner,).
    f_input_hz: frequency of the inputs [Hz], shape (corner,).
    f_output_hz: frequency of the outputs [Hz], shape (corner,).
    n_switching: gates or bits that switch [-].
    i_static_a: supply current of the stopped circuit [A].
    Returns the mean power [W], shape (corner,); a stopped clock leaves the static part alone.
    Source: Texas Instruments SCAA035B, CMOS power consumption and C_pd calculation.

    >>> round(cmos_loss_w(20e-12, 50e-12, 5.0, 10e6, 10e6), 6)
    0.0175
    """
    internal_w = c_internal_f * v_supply_v**2 * f_input_hz * n_switching
    load_w = c_load_f * v_supply_v**2 * f_output_hz
    return internal_w + load_w + v_supply_v * i_static_a

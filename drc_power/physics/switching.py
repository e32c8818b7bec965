"""Losses that every switching cycle costs: edges, recovery, output and gate charge, dead time, snubbers.

| symbol | name here | unit | meaning |
|---|---|---|---|
| V, I | v_off_v, i_on_a | V, A | voltage before and current after the edge |
| t_r, t_f | t_rise_s, t_fall_s | s | length of the turn-on and turn-off edge |
| Q_rr, Q_oss, Q_g | charge_coulomb | C | recovery, output and gate charge |
| f | f_switch_hz | Hz | switching frequency |

Arrays broadcast; the first axis is the corner or sample.
"""

from __future__ import annotations

import numpy as np

from drc_power.physics.range import refuse_unless


def overlap_energy_j(v_off_v, i_a, t_edge_s):
    """Energy of one hard edge on an inductive load: E = V · I · t/2.

    v_off_v: voltage of the open switch [V], shape (corner,).
    i_a: load current at the edge [A], shape (corner,).
    t_edge_s: current edge plus voltage edge, one after the other [s], shape (corner,).
    Returns the energy [J], shape (corner,). Valid for straight edges and a load current that does not move.
    Source: Infineon, MOSFET Power Losses Calculation Using the Data-Sheet Parameters, 2006, eq. 7 and next.

    >>> round(overlap_energy_j(48.0, 10.0, 35e-9) * 1e6, 6)
    8.4
    """
    return v_off_v * i_a * t_edge_s / 2.0


def overlap_loss_w(v_off_v, i_on_a, i_off_a, t_rise_s, t_fall_s, f_switch_hz):
    """Mean loss of both hard edges: P = V · (I_on · t_r + I_off · t_f)/2 · f.

    v_off_v: voltage of the open switch [V], shape (corner,).
    i_on_a: current taken over at turn-on [A], shape (corner,).
    i_off_a: current given up at turn-off [A], shape (corner,).
    t_rise_s, t_fall_s: length of the turn-on and of the turn-off edge [s].
    f_switch_hz: switching frequency [Hz].
    Returns the mean loss [W], shape (corner,). Valid for straight edges that fit in the period.
    Source: as `overlap_energy_j`.

    >>> round(overlap_loss_w(48.0, 10.0, 10.0, 20e-9, 15e-9, 200e3), 6)
    1.68
    """
    on_j = overlap_energy_j(v_off_v, i_on_a, t_rise_s)
    off_j = overlap_energy_j(v_off_v, i_off_a, t_fall_s)
    return (on_j + off_j) * f_switch_hz


def resistive_edge_energy_j(v_off_v, v_on_v, i_on_a, t_edge_s):
    """Energy of one edge on a resistive load, voltage and current moving together: E = I t · (V/6 + V_on/3).

    v_off_v: voltage of the open switch V [V], shape (corner,).
    v_on_v: voltage of the closed switch, up to `v_off_v` [V], shape (corner,).
    i_on_a: current of the closed switch [A], shape (corner,).
    t_edge_s: length of the edge [s], shape (corner,).
    Returns the energy [J], shape (corner,). Valid for straight edges from no current to the full current.
    Source: Rashid, Power Electronics, 4th edition, example 4.2: I t · (V/2 + (V_on − V)/3).

    >>> round(resistive_edge_energy_j(250.0, 2.0, 100.0, 1e-6) * 1e3, 4)
    4.2333
    """
    return i_on_a * t_edge_s * (v_off_v / 6.0 + v_on_v / 3.0)


def resistive_edge_peak_w(v_off_v, v_on_v, i_on_a):
    """Highest power within an edge on a resistive load: P = V² · I/(4 · (V − V_on)).

    v_off_v: voltage of the open switch V [V], shape (corner,).
    v_on_v: voltage of the closed switch, up to V/2 [V], shape (corner,).
    i_on_a: current of the closed switch [A], shape (corner,).
    Returns the peak power [W], shape (corner,). Valid for straight edges.
    Raises OutsideRange for a closed voltage above half the open one: the peak then lies past the edge.
    Source: Rashid, Power Electronics, 4th edition, example 4.2.

    >>> round(resistive_edge_peak_w(250.0, 2.0, 100.0), 1)
    6300.4
    """
    refuse_unless(
        np.less_equal(v_on_v, np.divide(v_off_v, 2.0)), "the closed voltage must be at most half the open one"
    )
    return v_off_v**2 * i_on_a / (4.0 * (v_off_v - v_on_v))


def recovery_loss_w(charge_coulomb, v_off_v, f_switch_hz):
    """Loss of a diode's reverse recovery: P = Q_rr · V · f, all of it, in switch and diode together.

    charge_coulomb: recovery charge at the commutated current and slope [C].
    v_off_v: voltage that the diode takes over [V], shape (corner,).
    f_switch_hz: switching frequency [Hz].
    Returns the mean loss [W], shape (corner,). An upper bound for the switch: a part heats the diode.
    Source: Infineon, MOSFET Power Losses Calculation Using the Data-Sheet Parameters, 2006, eq. 7.

    >>> round(recovery_loss_w(100e-9, 400.0, 100e3), 6)
    4.0
    """
    return charge_coulomb * v_off_v * f_switch_hz


def output_capacitance_loss_w(c_energy_f, v_off_v, f_switch_hz):
    """Loss of a switch that discharges its own output capacitance at turn-on: P = C_o(er) · V²/2 · f.

    c_energy_f: energy-related output capacitance at this voltage [F].
    v_off_v: voltage of the open switch [V], shape (corner,).
    f_switch_hz: switching frequency [Hz].
    Returns the mean loss [W], shape (corner,). Valid for hard turn-on of a single switch.
    Source: common practice; energy of a capacitor.

    >>> round(output_capacitance_loss_w(300e-12, 400.0, 100e3), 6)
    2.4
    """
    return c_energy_f * v_off_v**2 / 2.0 * f_switch_hz


def output_charge_loss_w(charge_coulomb, v_off_v, f_switch_hz):
    """Loss of charging the opposite switch of a half bridge, both switches together: P = Q_oss · V · f.

    charge_coulomb: output charge of one switch at this voltage [C].
    v_off_v: voltage of the half bridge [V], shape (corner,).
    f_switch_hz: switching frequency [Hz].
    Returns the mean loss [W], shape (corner,). Valid for one hard edge in a period.
    Source: common practice; the supply gives Q_oss · V in each cycle, all of which ends as heat.

    >>> round(output_charge_loss_w(40e-9, 24.0, 20e3), 6)
    0.0192
    """
    return charge_coulomb * v_off_v * f_switch_hz


def gate_loss_w(charge_coulomb, v_gate_v, f_switch_hz):
    """Power that the gate takes, all of it in the driver and the gate resistors: P = Q_g · V_g · f.

    charge_coulomb: total gate charge at this gate voltage [C].
    v_gate_v: swing of the gate [V], shape (corner,).
    f_switch_hz: switching frequency [Hz].
    Returns the mean power [W], shape (corner,).
    Source: ROHM 64AN035E Rev.002 lists the item; the formula is common practice.

    >>> round(gate_loss_w(100e-9, 12.0, 200e3), 6)
    0.24
    """
    return charge_coulomb * v_gate_v * f_switch_hz


def dead_time_loss_w(v_forward_v, i_a, t_dead_s, f_switch_hz):
    """Loss of the diode that carries the load between the two switches: P = V_F · I · t_d · f.

    v_forward_v: forward voltage of the diode at this current [V], shape (corner,).
    i_a: load current [A], shape (corner,).
    t_dead_s: both dead times of a period together [s].
    f_switch_hz: switching frequency [Hz].
    Returns the mean loss [W], shape (corner,).
    Source: ROHM 64AN035E Rev.002 lists the item; the formula is common practice.

    >>> round(dead_time_loss_w(0.8, 10.0, 60e-9, 200e3), 6)
    0.096
    """
    return v_forward_v * i_a * t_dead_s * f_switch_hz


def gate_edge_s(charge_coulomb, i_drive_a):
    """Time that a gate drive needs to move the charge of an edge: t = Q/I.

    charge_coulomb: gate charge of the edge, gate-drain plus the part past threshold [C].
    i_drive_a: mean current of the drive during the edge, above 0 [A].
    Returns the length of the edge [s].
    Source: common practice; definition of current.

    >>> round(gate_edge_s(15e-9, 0.5) * 1e9, 6)
    30.0
    """
    return charge_coulomb / i_drive_a


def rc_snubber_loss_w(c_f, v_step_v, f_switch_hz):
    """Power in the resistor of an RC snubber that is charged and discharged in full: P = C · V² · f.

    c_f: snubber capacitance [F].
    v_step_v: voltage step at the snubber [V], shape (corner,).
    f_switch_hz: switching frequency [Hz].
    Returns the mean power [W], shape (corner,): C · V²/2 at each of the two edges of a period, whatever the
    resistance. Valid when each state lasts several R · C.
    Source: common practice; energy balance.

    >>> round(rc_snubber_loss_w(1e-9, 48.0, 200e3), 6)
    0.4608
    """
    return 2.0 * rc_snubber_edge_loss_w(c_f, v_step_v, f_switch_hz)


def rc_snubber_edge_loss_w(c_f, v_step_v, f_switch_hz):
    """Power in the resistor from one of the two edges, as where a switch alone discharges: P = C · V²/2 · f.

    c_f: snubber capacitance [F].
    v_step_v: voltage step at the snubber [V], shape (corner,).
    f_switch_hz: switching frequency [Hz].
    Returns the mean power [W], shape (corner,).
    Source: Rashid, Power Electronics, 4th edition, example 4.5: P_s = 0.5 · C_s · V_s² · f_s.

    >>> round(rc_snubber_edge_loss_w(0.5455e-6, 220.0, 10e3), 1)
    132.0
    """
    return c_f * v_step_v**2 / 2.0 * f_switch_hz

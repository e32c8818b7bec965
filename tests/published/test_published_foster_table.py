"""Foster table printed at mathworks.com, help of the Foster thermal model block: FOUND.

R 0.0016, 0.0043, 0.0013, 0.0014 K/W with 0.0068, 0.064, 0.32, 2 s. The page prints no impedance; those below are
the formula evaluated in plain Python, and the periodic ones explicit periods carried on to rest.
"""

import math

import pytest

from drc_power.physics import transient
from drc_power.physics.impedance import cauer_to_foster, foster_to_cauer, foster_zth_k_per_w

R, TAU = [0.0016, 0.0043, 0.0013, 0.0014], [0.0068, 0.064, 0.32, 2.0]


def by_hand(t_s):
    return sum(r * (1 - math.exp(-t_s / tau)) for r, tau in zip(R, TAU, strict=True))


@pytest.mark.parametrize(
    ("t_s", "zth", "half_digit"),
    [(1e-3, 2.9023e-4, 0.5e-8), (10e-3, 1.90133e-3, 0.5e-8), (100e-3, 5.41585e-3, 0.5e-8), (1.0, 7.69374e-3, 0.5e-8)],
)
def test_impedance(t_s, zth, half_digit):
    assert by_hand(t_s) == pytest.approx(zth, abs=half_digit)
    assert foster_zth_k_per_w(t_s, R, TAU) == pytest.approx(by_hand(t_s), rel=1e-12)


def test_final_value():
    assert foster_zth_k_per_w(1e3, R, TAU) == pytest.approx(0.0086, abs=0.5e-4)


@pytest.mark.parametrize(
    ("duty", "f_hz", "peak_k", "valley_k", "closer_k", "bound_k"),
    [
        (0.5, 50, 4.9806, 3.6194, 5.1025, 5.2507),
        (0.1, 50, 1.1977, 0.6683, 1.2478, 1.3545),
        (0.5, 1, 7.7600, 0.8400, 7.8051, 7.9177),
    ],
)
def test_one_kilowatt_in_pulses(duty, f_hz, peak_k, valley_k, closer_k, bound_k):
    period_s = 1.0 / f_hz
    on_s = duty * period_s
    rises = [0.0] * 4
    for _ in range(25 * 2 * f_hz):
        peaks = [1e3 * r + (x - 1e3 * r) * math.exp(-on_s / tau) for x, r, tau in zip(rises, R, TAU, strict=True)]
        rises = [x * math.exp(-(period_s - on_s) / tau) for x, tau in zip(peaks, TAU, strict=True)]
    assert sum(peaks) == pytest.approx(peak_k, abs=0.5e-4)
    assert sum(rises) == pytest.approx(valley_k, abs=0.5e-4)
    assert transient.pulse_train_peak_k(1e3, on_s, period_s, R, TAU) == pytest.approx(sum(peaks), rel=1e-9)
    assert transient.pulse_train_valley_k(1e3, on_s, period_s, R, TAU) == pytest.approx(sum(rises), rel=1e-9)
    estimate_k = transient.pulse_train_estimate_k(
        1e3, duty, sum(R), by_hand(on_s), by_hand(period_s), by_hand(period_s + on_s)
    )
    assert estimate_k == pytest.approx(closer_k, abs=0.5e-4)
    assert transient.pulse_train_bound_k(1e3, duty, sum(R), by_hand(on_s)) == pytest.approx(bound_k, abs=0.5e-4)


def test_a_foster_network_of_two_terms_as_a_ladder():
    """(1 ohm, 10 ms), (2 ohm, 1 s): C 0.0098039, R 1.040192, C 0.500349, R 1.959808.
    DERIVED; checked by 1/C_1 = Σ 1/C_i, by the sum of the resistances and by the way back."""
    r, c = foster_to_cauer([1.0, 2.0], [0.01, 1.0])
    assert c[0] == pytest.approx(1 / (1 / 0.01 + 2 / 1.0), rel=1e-12)
    assert c[0] == pytest.approx(0.0098039, abs=0.5e-7)
    assert r == pytest.approx([1.040192, 1.959808], abs=0.5e-6)
    assert c[1] == pytest.approx(0.500349, abs=0.5e-6)
    assert r.sum() == pytest.approx(3.0, rel=1e-12)
    back_r, back_tau = cauer_to_foster(r, c)
    assert back_r == pytest.approx([1.0, 2.0], rel=1e-9)
    assert back_tau == pytest.approx([0.01, 1.0], rel=1e-9)

"""Correlations of papers seen by name only (MEMORY), their values worked out here apart from the code.

Bar-Cohen and Rohsenow 1984; Teertstra, Yovanovich and Culham 1999; Lee, Song, Au and Moran 1995; altitude.
Values of the compiled handbook library `ht` stand beside where it has the formula.
"""

import math

import pytest

from drc_power.physics import air, convection, fins, spreading


def test_optimum_spacing_is_the_numeric_optimum_of_the_composite_law():
    """Printed 2.714 and Nu 1.307; the optimum of the printed Nu formula lies at 2.7154 and 1.308."""
    best = max(range(20_000, 35_000), key=lambda n: _heat_per_width(n * 1e-4))
    assert best * 1e-4 == pytest.approx(2.7154, abs=1e-3)
    assert _nusselt(best * 1e-4) == pytest.approx(1.308, abs=0.5e-3)
    assert fins.channel_natural_nusselt((best * 1e-4) ** 4) == pytest.approx(_nusselt(best * 1e-4), rel=1e-9)
    assert fins.optimum_spacing_m(1.0, 1.0) == pytest.approx(best * 1e-4, rel=1e-3)


def _nusselt(s):
    """Gap s in units of L/Ra_L^(1/4), so that Ra′ = s⁴."""
    return 1 / math.sqrt(576 / s**8 + 2.873 / s**2)


def _heat_per_width(s):
    return _nusselt(s) / s**2


@pytest.mark.parametrize(
    ("speed", "gap_m", "length_m", "reynolds", "nusselt", "h"),
    [(2, 3e-3, 0.1, 11.25, 2.584, 22.4), (5, 3e-3, 0.1, 28.1, 3.993, 34.6), (2, 10e-3, 0.05, 250, 10.385, 27.0)],
)
def test_forced_channel(speed, gap_m, length_m, reynolds, nusselt, h):
    """ν 1.6e-5, Pr 0.71, k 0.026."""
    found = speed * gap_m / 1.6e-5 * gap_m / length_m
    assert found == pytest.approx(reynolds, rel=0.002)
    developed = found * 0.71 / 2
    developing = 0.664 * math.sqrt(found) * 0.71 ** (1 / 3) * math.sqrt(1 + 3.65 / math.sqrt(found))
    by_hand = 1 / (1 / developed**3 + 1 / developing**3) ** (1 / 3)
    assert by_hand == pytest.approx(nusselt, abs=0.5e-3)
    assert fins.channel_forced_nusselt(found, 0.71) == pytest.approx(by_hand, rel=1e-9)
    assert by_hand * 0.026 / gap_m == pytest.approx(h, abs=0.05)


def test_spreading():
    """100 x 100 x 1.3 mm of 200 W/(m·K), 1.0 K/W outside, source 25 x 25: λ 95.68, R 0.6566, total 1.657 K/W; the
    exact series for equal-area discs, at the centre, 0.6680: the closed form is 1.7 % low there."""
    lam = math.pi**1.5 / 0.1 + 1 / 0.025
    assert lam == pytest.approx(95.68, abs=0.005)
    product, depth = lam * 200 * 0.01 * 1.0, math.tanh(lam * 1.3e-3)
    by_hand = (0.1 - 0.025) / (200 * math.sqrt(math.pi * 0.01 * 625e-6)) * (product + depth) / (1 + product * depth)
    assert by_hand == pytest.approx(0.6566, abs=0.5e-4)
    ours = spreading.spreading_rth_k_per_w(625e-6, 0.01, 1.3e-3, 200.0, 1.0)
    assert ours == pytest.approx(by_hand, rel=1e-9)
    series = spreading.placed_rise_k_per_w(
        (0.05, 0.05, 0, 0), (0.05, 0.05, 0.025, 0.025), (0.1, 0.1), 1.3e-3, 200.0, 100.0
    )
    assert series - 1.0 - 1.3e-3 / (200 * 0.01) == pytest.approx(0.6680, abs=0.002)


@pytest.mark.parametrize(
    ("law", "ra_or_re", "expected"),
    [
        (convection.horizontal_plate_up_nusselt, 1e6, 17.076),
        (convection.horizontal_plate_down_nusselt, 1e6, 8.538),
        (lambda re: convection.flat_plate_nusselt(re, 0.7), 1e4, 58.957),
        (lambda ra: convection.vertical_plate_nusselt(ra, 0.69), 1.813e9, 147.12),
    ],
)
def test_values_of_ht(law, ra_or_re, expected):
    """Computed with ht 1.2.0; McAdams, Baehr, Churchill and Chu."""
    assert law(ra_or_re) == pytest.approx(expected, abs=0.01 if expected > 100 else 0.5e-3)


def test_annular_fin_of_the_library_documentation():
    """ht's documentation: Do 0.0254, D_fin 0.05715, t 3.8e-4, k 200, h 58 give 0.84126."""
    assert fins.annular_fin_efficiency(0.0127, 0.028575, 3.8e-4, 200.0, 58.0) == pytest.approx(0.84126, abs=0.5e-5)


def test_radiation():
    """ε 0.8, 85 and 25 °C: 387.92 W/m², 6.465 W/(m²·K); ε 0.85, 400 and 305 K: 816.78 W/m²."""
    assert convection.radiated_w_per_m2(0.8, 85.0, 25.0) == pytest.approx(387.92, abs=0.005)
    assert convection.radiation_h_w_per_m2_k(0.8, 85.0, 25.0) == pytest.approx(6.465, abs=0.5e-3)
    assert convection.radiated_w_per_m2(0.85, 400 - 273.15, 305 - 273.15) == pytest.approx(816.78, abs=0.005)


@pytest.mark.parametrize(("altitude_m", "share"), [(1524.0, 0.8617), (3000.0, 0.7422), (3048.0, 0.7386)])
def test_density(altitude_m, share):
    """U.S. Standard Atmosphere 1976, by `fluids`; ours takes heights as geopotential, 2e-4 away at these."""
    assert air.density_share(altitude_m) == pytest.approx(share, abs=2e-4)


@pytest.mark.parametrize(("exponent", "factor"), [(0.4, 1.129), (0.5, 1.164), (0.8, 1.274), (1.0, 1.354)])
def test_altitude_factors_at_3048_m(exponent, factor):
    """Exponents of the laws (DERIVED), density of the standard atmosphere: 0.7386 to the power −n."""
    assert 0.7386**-exponent == pytest.approx(factor, abs=0.5e-3)
    assert air.altitude_rise_share(3048.0, exponent) == pytest.approx(0.7386**-exponent, abs=0.5e-3)


def test_quick_altitude_rule_of_air_cooling():
    """Capacity 1 − h/17 500 (FOUND, h in metres): 0.826 at 3048 m, between the laminar and the heat-up laws."""
    rule = 1 - 3048 / 17_500
    assert rule == pytest.approx(0.826, abs=0.5e-3)
    assert 1 / air.altitude_rise_share(3048.0, 1.0) < rule < 1 / air.altitude_rise_share(3048.0, 0.4)

"""Two hundred regulators, each on a patch of copper of its own: a whole check in seconds."""

import time

import pytest
from draw import write_board

from drc_power.run import check

N = 200
DEVICE = """
  ldo: {kind: linear-regulator, source: "invented", limits: {vin: 40 V, differential: 38 V, current: 0.8 A, power: 20 W, tj: 150 °C},
    conduction: {dropout: 1.2 V, quiescent: 5 mA}, thermal: {rth_jc: 3 K/W}}
"""


def annotations():
    rows = {"rails": ["VBAT: {voltage: 20 V .. 24 V .. 28 V, source: J1}"], "loads": [], "patches": [], "parts": []}
    for k in range(N):
        rows["rails"].append(f'"/V{k}": {{voltage: 5 V, held_by: U{k}}}')
        rows["loads"].append(f'l{k}: {{net: "/V{k}", draws: 20 mA}}')
        rows["patches"].append(f"p{k}: {{area: {2 + k % 5} cm², thickness: 35 um, layers: {1 + k % 2}}}")
        rows["parts"].append(f"U{k}: {{device: ldo, heat: {{copper: p{k}}}}}")
    text = {name: "\n    ".join(lines) for name, lines in rows.items()}
    return (f"surroundings: {{ambient: -20 °C .. 50 °C}}\ngrounds: [GND]\nrails:\n    {text['rails']}\nloads:\n    {text['loads']}\n"
            f"copper:\n  patches:\n    {text['patches']}\nparts:\n    {text['parts']}\n")


@pytest.fixture(scope="module")
def timed(tmp_path_factory):
    parts = {"J1": ("Conn_01x02", "BATTERY", "VBAT", "GND")}
    parts |= {f"U{k}": ("REG", "REG-5V0", "VBAT", "GND", f"/V{k}") for k in range(N)}
    path = write_board(tmp_path_factory.mktemp("many"), parts, annotations(), DEVICE)
    began = time.process_time()
    return check(path), time.process_time() - began


def test_within_five_seconds(timed):
    assert timed[1] < 5.0


def test_more_layers_and_area_run_cooler(timed):
    """U0 has 2 cm² on one layer, U4 6 cm², U5 2 cm² on two layers; all burn the same."""
    tj = {f.ref: f.value for f in timed[0].findings if f.rule == "junction.steady"}
    assert len(tj) == N and tj["U4"] < tj["U0"] and tj["U5"] < tj["U0"]

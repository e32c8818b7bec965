"""What holds in each mode: changes over `like` over the base, key by key."""

import pytest

from drc_power.faults import InputError
from drc_power.intake import read_annotations

TEXT = """\
format: 1
netlist: b.net
surroundings: {ambient: -30 °C .. 55 °C, altitude: 800 m}
rails:
  A: {voltage: 24 V, source: J1, limit: 20 A}
loads:
  heater: {net: A, return: H, resistance: 12 ohm ± 5 %}
  chip:   {net: A, draws: 10 mA, needs: 20 V .. 30 V}
  motor:  {net: A, kind: motor, draws: 3 A .. 9 A, resistance: 0.35 ohm}
stages:
  fan: {kind: half-bridge, high: Q3, low: D4, load: motor, frequency: 20 kHz, duty: 20 % .. 95 %}
parts:
  Q3: {device: fet, state: switching, heat: {sink: rail, interface: 0.6 K/W}}
sinks: {rail: {resistance: 1 K/W}}
modes:
  run:   {}
  idle:  {loads: {heater: 0 A, motor: 0 A}, parts: {"Q*": {state: blocked}}}
  warm:  {like: idle, loads: {heater: 40 W}, rails: {A: {voltage: 26 V}}, surroundings: {ambient: 10 °C}}
  hot:   {like: warm, loads: {heater: {resistance: 10 ohm}, motor: 0.4 ohm, chip: {min: 1 mA, max: 3 mA}}, stages: {fan: {duty: 50 %}}}
  extra: {loads: {lamp: {net: A, power: 5 W}}, parts: {Q3: {heat: {case: 70 °C}}}}
"""


@pytest.fixture
def notes(project):
    return read_annotations(project.write("b.power.yaml", TEXT))


def test_an_empty_mode_is_the_base(notes):
    view = notes.in_mode("run")
    assert view.loads == dict(notes.loads) and view.rails == dict(notes.rails) and view.surroundings == notes.surroundings


def test_a_bare_quantity_is_a_demand_by_its_unit_and_takes_the_place_of_the_old(notes):
    idle, warm = notes.in_mode("idle").loads["heater"], notes.in_mode("warm").loads["heater"]
    assert (idle.demands, idle.draws.typ, idle.resistance) == (("draws",), 0.0, None)
    assert (warm.demands, warm.power.typ, warm.draws, warm.resistance) == (("power",), 40.0, None, None)
    assert idle.return_ == warm.return_ == "H" and warm.net == "A"


def test_a_span_as_a_mapping_is_a_bare_quantity_too(notes):
    chip = notes.in_mode("hot").loads["chip"]
    assert (chip.draws.min, chip.draws.typ, chip.draws.max) == (0.001, 0.002, 0.003)


def test_a_demand_written_in_full_takes_the_place_of_the_old_too(notes):
    assert notes.in_mode("hot").loads["heater"].demands == ("resistance",)
    assert notes.in_mode("hot").loads["heater"].resistance.typ == 10.0


def test_a_motor_keeps_its_resistance_for_a_stall(notes):
    idle, hot = notes.in_mode("idle").loads["motor"], notes.in_mode("hot").loads["motor"]
    assert (idle.demands, idle.draws.typ, idle.resistance.typ) == (("draws",), 0.0, 0.35)
    assert (hot.demands, hot.draws.typ, hot.resistance.typ) == (("draws",), 0.0, 0.4)


def test_keys_that_a_mode_does_not_name_stay(notes):
    view = notes.in_mode("warm")
    assert (view.rails["A"].voltage.typ, view.rails["A"].limit.typ, view.rails["A"].source) == (26.0, 20.0, ("J1",))
    assert (view.surroundings.ambient.typ, view.surroundings.altitude.typ) == (10.0, 800.0)
    assert view.loads["chip"].needs.max == 30.0
    fan = notes.in_mode("hot").stages["fan"]
    assert (fan.duty.typ, fan.kind, fan.frequency.typ, fan.load) == (0.5, "half-bridge", 20e3, "motor")


def test_like_runs_from_the_farthest_to_the_nearest(notes):
    hot = notes.in_mode("hot")
    assert (hot.surroundings.ambient.typ, hot.rails["A"].voltage.typ) == (10.0, 26.0)
    assert hot.resolve_parts(["Q3"])["Q3"].state == "blocked"


def test_a_mode_may_add_what_is_complete_in_itself(notes):
    assert notes.in_mode("extra").loads["lamp"].power.typ == 5.0 and "lamp" not in notes.in_mode("run").loads


def test_a_glob_of_a_mode_beats_a_name_of_the_base(notes):
    part = notes.in_mode("idle").resolve_parts(["Q3", "Q4"])
    assert (part["Q3"].state, part["Q3"].device, part["Q4"].state, part["Q4"].device) == ("blocked", "fet", "blocked", None)


def test_heat_is_replaced_as_a_whole(notes):
    """Half a heat path left over from the base would stand in parallel and flatter the part."""
    heat = notes.in_mode("extra").resolve_parts(["Q3"])["Q3"].heat
    assert (heat.case.typ, heat.sink, heat.interface) == (70.0, None, None)


def test_the_source_of_a_value_is_where_it_was_last_written(notes):
    rail = notes.in_mode("warm").rails["A"]
    assert rail.source_of("voltage").line == 18 and rail.source_of("limit").line == 5
    assert notes.in_mode("idle").loads["heater"].source_of("draws").line == 17


def test_modes_left_out_are_one_mode(project):
    notes = read_annotations(project.write("b.power.yaml", "format: 1\nnetlist: b.net\nloads: {x: {net: A, draws: 1 A}}\n"))
    assert notes.mode_names == ("run",) and notes.in_mode("run").loads["x"].draws.typ == 1.0


def test_a_mode_that_is_not_there(notes):
    with pytest.raises(InputError, match="there is no mode 'idel'; write 'idle'"):
        notes.in_mode("idel")


def test_a_mode_may_be_left_empty(project):
    notes = read_annotations(project.write("b.power.yaml", "format: 1\nnetlist: b.net\nmodes:\n  run:\n  rest: {}\n"))
    assert notes.mode_names == ("run", "rest")

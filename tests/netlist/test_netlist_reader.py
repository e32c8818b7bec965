"""What the reader makes of the clauses of a netlist, one convention at a time."""

import hashlib

import pytest

from drc_power.faults import InputError
from drc_power.netlist import Pin, natural_key, parse_netlist, read_netlist


def netlist_of(components="", nets="", libparts="", design=""):
    return parse_netlist(
        f'(export (version "E") (design {design})\n(components {components})\n'
        f"(libparts {libparts})\n(nets {nets}))",
        "board.net",
    )


def part_of(inside, libparts=""):
    return netlist_of(f'(comp (ref "R1") {inside})', libparts=libparts).parts["R1"]


def faults_of(*args, **kwargs):
    with pytest.raises(InputError) as raised:
        netlist_of(*args, **kwargs)
    return [str(fault) for fault in raised.value.faults]


def net(name, *pins, code="1"):
    nodes = " ".join('(node (ref "{}") (pin "{}"))'.format(*pin.split(".")) for pin in pins)
    return f'(net (code "{code}") (name "{name}") {nodes})'


class TestFields:
    def test_a_field_wins_over_a_property(self):
        part = part_of(
            '(property (name "Voltage") (value "16 V")) (property (name "MPN") (value "RZ-1"))'
            '(fields (field (name "Voltage") "25 V") (field (name "Empty")))'
        )
        assert part.fields == {"Voltage": "25 V", "MPN": "RZ-1", "Empty": ""}

    def test_the_properties_of_the_sheet_are_not_the_parts(self):
        part = part_of(
            '(property (name "MPN") (value "RZ-1")) (property (name "Sheetname") (value "supply"))'
            '(property (name "Sheetfile") (value "supply.kicad_sch")) (property (name "Voltage") (value "12 V"))'
            '(property (name "ki_keywords") (value "res")) (property (name "dnp"))'
        )
        assert part.fields == {"MPN": "RZ-1"}
        assert (part.keywords, part.dnp) == ("res", True)

    def test_datasheet_is_a_field_in_every_version(self):
        assert part_of('(datasheet "rz.pdf")').fields == {"Datasheet": "rz.pdf"}

    def test_a_footprint_may_stand_in_a_field(self):
        assert part_of('(fields (field (name "Footprint") "Res:0603"))').footprint == "Res:0603"

    def test_fields_are_in_order_of_name(self):
        part = part_of('(fields (field (name "B") "1") (field (name "A") "2"))')
        assert list(part.fields) == ["A", "B"]

    def test_a_lone_tilde_is_nothing(self):
        part = part_of('(value "~") (fields (field (name "A") "~"))')
        assert (part.value, part.fields) == ("", {"A": ""})

    def test_a_field_with_two_values_is_refused(self):
        (fault,) = faults_of('(comp (ref "C1")\n (fields (field (name "V") "25 V")\n (field (name "V") "50 V")))')
        assert fault.startswith('board.net:4:2: C1\'s field "V" is written twice, as "25 V" and as "50 V"; keep one')

    def test_a_value_with_two_texts_is_refused(self):
        (fault,) = faults_of('(comp (ref "C1") (value "1u") (value "2u"))')
        assert fault.startswith('board.net:2:13: (value ...) is written twice, as "1u" and as "2u"')


class TestMarks:
    @pytest.mark.parametrize("mark", ["dnp", "exclude_from_bom", "exclude_from_board", "exclude_from_sim"])
    @pytest.mark.parametrize(
        "written, is_set",
        [
            ('(property (name "{}"))', True),
            ('(property (name "{}") (value "1"))', True),
            ('(property (name "{}") (value "yes"))', True),
            ('(property (name "{}") (value "0"))', False),
            ('(property (name "{}") (value "no"))', False),
            ('(property (name "{}") (value ""))', False),
            ("({})", True),
            ("({} yes)", True),
            ('({} "1")', True),
            ("({} no)", False),
            ("", False),
        ],
    )
    def test_spellings(self, mark, written, is_set):
        part = part_of(written.format(mark))
        assert getattr(part, mark) is is_set
        marks = (part.dnp, part.exclude_from_bom, part.exclude_from_board, part.exclude_from_sim)
        assert sum(marks) == is_set

    def test_simulation_switched_off_by_a_field(self):
        assert part_of('(fields (field (name "Sim.Enable") "0"))').exclude_from_sim
        assert not part_of('(fields (field (name "Sim.Enable") "1"))').exclude_from_sim

    def test_a_variant_says_nothing_about_the_part_itself(self):
        part = part_of('(variants (variant (name "bare") (property (name "dnp") (value "1"))))')
        assert not part.dnp


class TestIdentity:
    def test_the_path_is_of_the_sheet_and_the_first_uuid(self):
        part = part_of('(sheetpath (names "/a/b/") (tstamps "/u1/u2/")) (tstamps "u9" "u3" "u7")')
        assert (part.uuid, part.uuids, part.sheet) == ("/u1/u2/u3", ("u3", "u7", "u9"), "/a/b/")

    def test_uuids_in_one_text(self):
        assert part_of('(tstamps "u9 u3")').uuids == ("u3", "u9")

    def test_time_stamp_of_old(self):
        assert part_of("(sheetpath (names /) (tstamps /)) (tstamp 5A1B2C3D)").uuid == "/5A1B2C3D"

    def test_without_a_stamp_there_is_no_path(self):
        assert part_of('(sheetpath (names "/") (tstamps "/"))').uuid == ""


SYMBOL = """(libpart (lib "L") (part "S") {jumpers} (pins
    (pin (num "10") (name "NC") (type "no_connect")) (pin (num "1") (name "IN") (type "input"))
    (pin (num "2") (name "") (type "passive"))))"""
PART = '(comp (ref "U1") {jumpers} (libsource (lib "L") (part "S") (description "")))'


class TestPins:
    def pin(self, node, symbol=SYMBOL):
        components = PART.format(jumpers="")
        nets = f'(net (code "1") (name "A") (node (ref "U1") (pin "1") {node}))'
        pins = netlist_of(components, nets, symbol.format(jumpers="")).parts["U1"].pins
        return next(pin for pin in pins if pin.number == "1")

    def test_all_pins_of_the_symbol_in_natural_order(self):
        part = netlist_of(PART.format(jumpers=""), net("A", "U1.2", "U1.EP"), SYMBOL.format(jumpers="")).parts["U1"]
        assert part.pins == (
            Pin("1", "IN", "input", ""),
            Pin("2", "", "passive", "A"),
            Pin("10", "NC", "no_connect", ""),
            Pin("EP", "", "", "A"),
        )
        assert part.nets_of() == ("A",)

    def test_what_the_net_says_wins(self):
        assert self.pin('(pinfunction "ALT") (pintype "output")') == Pin("1", "ALT", "output", "A")

    def test_what_the_net_leaves_out_the_symbol_says(self):
        assert self.pin("") == Pin("1", "IN", "input", "A")

    def test_the_number_after_the_name_is_no_part_of_it(self):
        assert self.pin('(pinfunction "IN_1")').name == "IN"

    def test_a_name_that_ends_in_its_number_is_kept(self):
        assert self.pin('(pinfunction "Pin_1")', SYMBOL.replace('"IN"', '"Pin_1"')).name == "Pin_1"
        assert self.pin('(pinfunction "Pin_1_1")', SYMBOL.replace('"IN"', '"Pin_1"')).name == "Pin_1"
        assert self.pin('(pinfunction "Pin_1")', "").name == "Pin_1"

    def test_a_pin_listed_twice_on_a_net_is_one(self):
        netlist = netlist_of(PART.format(jumpers=""), net("A", "U1.1", "U1.1"))
        assert len(netlist.nets["A"].nodes) == len(netlist.parts["U1"].pins) == 1

    def test_an_alias_has_the_pins_of_its_symbol(self):
        symbol = SYMBOL.replace('(part "S")', '(part "BASE") (aliases (alias "OTHER") (alias "S"))')
        assert self.pin("", symbol).name == "IN"

    def test_two_descriptions_of_a_symbol_are_one_in_either_order(self):
        other = SYMBOL.replace('"IN"', '"AIN"').replace('"10"', '"11"')
        for symbol in (SYMBOL + other, other + SYMBOL):
            pins = netlist_of(PART.format(jumpers=""), "", symbol.format(jumpers="")).parts["U1"].pins
            assert [(pin.number, pin.name) for pin in pins] == [("1", "AIN"), ("2", ""), ("10", "NC"), ("11", "NC")]

    def test_a_pin_shared_by_units_belongs_to_none(self):
        units = (
            '(units (unit (name "A") (pins (pin (num "1")) (pin (num "8")))) (unit (name "B") (pins (pin (num "8")))))'
        )
        part = netlist_of(f'(comp (ref "U1") {units})', net("A", "U1.1", "U1.8")).parts["U1"]
        assert (part.units, [pin.unit for pin in part.pins]) == (("A", "B"), ["A", ""])


GROUPS = '(jumper_pin_groups (group (pin "1") (pin "3")))'
SAME_NUMBERS = '(duplicate_pin_numbers_are_jumpers "1")'


class TestJumpers:
    def joined(self, *names, jumpers=GROUPS):
        """The net that a part's pins 1 and 3 make when they stand on the given nets."""
        pins = ["U1.1", "U1.3", "R1.1"]
        nets = "".join(net(name, pin) for name, pin in zip(names, pins, strict=False))
        netlist = netlist_of(PART.format(jumpers=jumpers) + '(comp (ref "R1"))', nets)
        return netlist, netlist.net_named(names[0])

    @pytest.mark.parametrize(
        "names, canonical",
        [
            (("Net-(U1-Pad1)", "/HEAT"), "/HEAT"),
            (("unconnected-(U1-A-Pad1)", "Net-(U1-Pad3)"), "Net-(U1-Pad3)"),
            (("N-000001", "/HEAT"), "/HEAT"),
            (("/HEAT", "GND"), "GND"),
            (("/HEAT10", "/HEAT9"), "/HEAT9"),
            (("+5V", "+24V"), "+5V"),
        ],
    )
    def test_a_given_name_speaks_for_the_joined_net(self, names, canonical):
        for order in (names, names[::-1]):
            netlist, joined = self.joined(*order)
            (other,) = set(names) - {canonical}
            assert (joined.name, joined.aliases) == (canonical, (other,))
            assert list(netlist.nets) == [canonical]
            assert netlist.net_named(other) is netlist.nets[canonical]
            assert {pin.net for pin in netlist.parts["U1"].pins} == {canonical}
            assert {(node.ref, node.pin) for node in joined.nodes} == {("U1", "1"), ("U1", "3")}

    @pytest.mark.parametrize("in_symbol", [False, True])
    @pytest.mark.parametrize("jumpers", [SAME_NUMBERS, "(duplicate_pin_numbers_are_jumpers yes)"])
    def test_pins_that_share_a_number(self, in_symbol, jumpers):
        own, of_symbol = ("", jumpers) if in_symbol else (jumpers, "")
        nets = net("A", "U1.1") + net("B", "U1.1")
        netlist = netlist_of(PART.format(jumpers=own), nets, SYMBOL.format(jumpers=of_symbol))
        assert list(netlist.nets) == ["A"] and netlist.nets["A"].aliases == ("B",)

    def test_groups_in_the_symbol(self):
        nets = net("A", "U1.1") + net("B", "U1.3")
        netlist = netlist_of(PART.format(jumpers=""), nets, SYMBOL.format(jumpers=GROUPS))
        assert list(netlist.nets) == ["A"]

    def test_joins_go_on_from_part_to_part(self):
        comps = "".join(f'(comp (ref "J{n}") {GROUPS})' for n in range(1, 40))
        nets = "".join(net(f"/N{n}", f"J{n}.1", f"J{n - 1}.3") if n > 1 else net("/N1", "J1.1") for n in range(1, 40))
        netlist = netlist_of(comps, nets)
        assert list(netlist.nets) == ["/N1"]
        assert netlist.nets["/N1"].aliases == tuple(f"/N{n}" for n in range(2, 40))

    def test_no_mark_no_join(self):
        netlist, _ = self.joined("A", "B", jumpers='(duplicate_pin_numbers_are_jumpers "0")')
        assert list(netlist.nets) == ["A", "B"]

    def test_pins_of_a_group_may_be_on_no_net(self):
        netlist = netlist_of(PART.format(jumpers=GROUPS), net("A", "U1.1"))
        assert list(netlist.nets) == ["A"]


class TestHarmless:
    def test_a_netlist_of_nothing(self):
        netlist = netlist_of()
        assert (dict(netlist.parts), dict(netlist.nets)) == ({}, {})
        assert netlist.net_named("GND") is None

    def test_nets_without_pins_and_parts_without_pins(self):
        netlist = netlist_of('(comp (ref "H1"))', '(net (code "1") (name "GND"))')
        assert netlist.parts["H1"].pins == netlist.nets["GND"].nodes == ()

    def test_clauses_it_does_not_know_are_passed_over(self):
        netlist = netlist_of('(spice (a 1)) (comp (ref "R1") (color (r 1) "red") (value "1k"))', "(chains (net 3))")
        assert netlist.parts["R1"].value == "1k"
        assert not netlist.nets

    def test_power_symbols_are_not_parts(self):
        netlist = netlist_of('(comp (ref "#PWR1") (value "GND"))', net("GND", "#PWR1.1", "#FLG2.1"))
        assert not netlist.parts and netlist.nets["GND"].nodes == ()

    def test_a_part_written_twice_alike_is_one(self):
        assert list(netlist_of('(comp (ref "R1") (value "1k"))\n' * 2).parts) == ["R1"]

    def test_a_net_without_a_name_gets_the_one_kicad_gives(self):
        assert list(netlist_of('(comp (ref "R1"))', net("", "R1.1", code="7")).nets) == ["N-000007"]


class TestFaults:
    @pytest.mark.parametrize(
        "components, nets, fault",
        [
            (
                '(comp (ref "R1") (value "1k"))\n(comp (ref "R1") (value "2k"))',
                "",
                'board.net:3:1: reference "R1" stands for two parts, the other at line 2; annotate the schematic',
            ),
            ("(comp (value 1k))", "", "board.net:2:13: a part without a reference; annotate the schematic"),
            (
                '(comp (ref "R12"))',
                net("GND", "R13.1"),
                'board.net:4:36: net "GND" names part "R13", which is not in the netlist; did you mean R12?',
            ),
            (
                '(comp (ref "R1"))',
                net("GND", "R1.1") + "\n" + net("+5V", "R1.1"),
                'board.net:5:30: pin 1 of R1 is on two nets, "GND" and "+5V"; connect it to one of them',
            ),
            (
                '(comp (ref "R1"))',
                net("GND", "R1.1") + "\n" + net("GND", "R1.2"),
                'board.net:5:1: net "GND" is written twice with different pins, first at line 4; export',
            ),
            (
                '(comp (ref "R1"))',
                '(net (name "A") (node (ref "R1")))',
                'board.net:4:23: net "A" lists a node without a pin',
            ),
            (
                '(comp (ref "R1"))',
                '(net (name "A") (node (pin "1")))',
                'board.net:4:23: net "A" lists a node without a part',
            ),
            (
                '(comp (ref "R1"))',
                '(net (node (ref "R1") (pin "1")))',
                "board.net:4:7: a net without a name; export",
            ),
        ],
    )
    def test_what_is_wrong_and_where(self, components, nets, fault):
        (found,) = faults_of(components, nets)
        assert found.startswith(fault)

    def test_every_unknown_part_is_named_once_up_to_a_bound(self):
        pins = [f"X{n}.{pin}" for n in range(100) for pin in (1, 2)]
        faults = faults_of("", net("GND", *pins))
        assert len(faults) == 20
        assert 'names part "X19"' in faults[-1]

    def test_text_of_the_file_is_quoted_on_one_line(self):
        long = "b" * 99
        (fault,) = faults_of(rf'(comp (ref "R\n1") (value "a\x1b[31m{long}") (fields (field (name "V") "1"))'
                             rf' (fields (field (name "V") "a\x1b[31m{long}")))')
        assert "\n" not in fault and "\x1b" not in fault
        assert r'field "V" is written twice, as "1" and as "a\x1b[31mbbb' in fault and "bbb…" in fault

    @pytest.mark.parametrize("section", ["components", "nets"])
    def test_a_section_that_is_missing(self, section):
        sections = {"components": "(components)", "nets": "(nets)"}
        del sections[section]
        with pytest.raises(InputError, match=rf"board.net:1:1: the netlist has no \({section} \.\.\.\) section"):
            parse_netlist(f"(export (version E) {' '.join(sections.values())})", "board.net")


class TestNotANetlist:
    @pytest.mark.parametrize(
        "text, kind",
        [
            ("(kicad_sch (version 20250114)", "a KiCad schematic"),
            ("\n# comment\n(kicad_pcb", "a KiCad board"),
            ("(kicad_symbol_lib", "a KiCad symbol library"),
            ('(footprint "R"', "a KiCad footprint"),
            ('<?xml version="1.0"?>\n<export version="E">', "an XML file"),
            ("EESchema Schematic File Version 4", "a schematic of KiCad 5 or older"),
            ("# EESchema Netlist Version 1.1\n(\n ( /4B", "a netlist in the format of KiCad before version 4"),
            ("( { EESchema Netlist Version 1.1 }", "a netlist in the format of KiCad before version 4"),
            (".title KiCad schematic", "a SPICE netlist"),
            ('{"board": 1}', "a JSON file"),
        ],
    )
    def test_it_says_what_the_file_looks_like(self, text, kind):
        with pytest.raises(InputError) as raised:
            parse_netlist(text, "frost/fan.net")
        (fault,) = raised.value.faults
        assert f"this is {kind}" in fault.found and "not a netlist" in fault.found
        assert fault.instead == "export one with: kicad-cli sch export netlist -o fan.net fan.kicad_sch"
        assert fault.mark.line >= 1

    @pytest.mark.parametrize("text", ["R1 10k", "(design (version E))", "()", ")", '"'])
    def test_something_else(self, text):
        with pytest.raises(InputError, match=r"board.net:1:\d: this is not a netlist"):
            parse_netlist(text, "board.net")

    @pytest.mark.parametrize("text", ["", " \n\t\n"])
    def test_nothing(self, text):
        with pytest.raises(InputError, match="board.net:1:1: the file is empty; export one with"):
            parse_netlist(text, "board.net")


class TestFiles:
    def test_path_and_digest(self, tmp_path):
        path = tmp_path / "b.net"
        path.write_bytes(b"\xef\xbb\xbf(export (components) (nets))\r\n")
        netlist = read_netlist(path)
        assert netlist.path == str(path)
        assert netlist.sha256 == hashlib.sha256(path.read_bytes()).hexdigest()

    def test_a_missing_file_and_one_of_a_like_name(self, tmp_path):
        (tmp_path / "frost-fan.net").touch()
        with pytest.raises(InputError, match="there is no such file; did you mean .*frost-fan.net?"):
            read_netlist(tmp_path / "frost-fna.net")
        with pytest.raises(InputError, match="there is no such file; check the path"):
            read_netlist(tmp_path / "nowhere" / "x.net")

    def test_a_folder(self, tmp_path):
        with pytest.raises(InputError, match="this is a folder; name the netlist file in it"):
            read_netlist(tmp_path)

    def test_a_file_that_may_not_be_read(self, tmp_path, monkeypatch):
        def refuse(*_):
            raise PermissionError(13, "Permission denied")

        monkeypatch.setattr("builtins.open", refuse)
        with pytest.raises(InputError, match=r"b.net: the file cannot be read \(Permission denied\)"):
            read_netlist("b.net")

    def test_a_path_that_cannot_be(self):
        with pytest.raises(InputError, match="the file cannot be read"):
            read_netlist("a\0b.net")


def test_order_of_nodes_and_nets_is_natural():
    refs = ["U1", "R10", "R9", "C1"]
    netlist = netlist_of(
        "".join(f'(comp (ref "{ref}"))' for ref in refs),
        net("/N10", "R10.2", "R9.10", "R9.2") + net("/N9", "U1.1") + net("+5V", "C1.1"),
    )
    assert list(netlist.parts) == sorted(refs, key=natural_key)
    assert list(netlist.nets) == ["+5V", "/N9", "/N10"]
    assert [(node.ref, node.pin) for node in netlist.nets["/N10"].nodes] == [("R9", "2"), ("R9", "10"), ("R10", "2")]


def test_heading_is_of_the_first_sheet():
    sheet = '(sheet (number "{}") (title_block (title "{}") (rev "{}")))'
    design = '(source "a.kicad_sch") (tool "Eeschema 9")' + sheet.format(2, "Two", "x") + sheet.format(1, "One", "C")
    netlist = netlist_of(design=design)
    assert (netlist.title, netlist.revision, netlist.tool) == ("One", "C", "Eeschema 9")


def test_a_pad_without_a_number_is_no_pin():
    """KiCad's own demo projects have mounting holes whose pads are numbered with the empty text."""
    from drc_power.netlist.reader import parse_netlist

    text = '''(export (version "E") (components (comp (ref "H1") (value "Hole")) (comp (ref "R1") (value "1k")))
      (nets (net (code "1") (name "GND") (node (ref "H1") (pin "") (pintype "passive")) (node (ref "R1") (pin "1")))
            (net (code "2") (name "A") (node (ref "H1") (pin "")) (node (ref "R1") (pin "2")))))'''
    netlist = parse_netlist(text, "holes.net")
    assert [node.ref for node in netlist.nets["GND"].nodes] == ["R1"]
    assert netlist.parts["H1"].pins == ()

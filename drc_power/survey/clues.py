"""What a part's texts say of its kind: one row, one piece of evidence. Weights add up over all rows that match.

| source | text that the pattern is searched in |
|---|---|
| reference | the letters that the reference starts with |
| symbol | name of the library symbol |
| library | nickname of the symbol library |
| text | description and keywords |
| footprint | footprint with its library |
| value | value text, then the symbol name where the value says no more than the symbol |
| model | the simulation device of the `Sim.*` fields |

A weight near 1 is a habit that people break (reference letters), 2 a good sign, 4 close to proof. Families of part
numbers are those that many makers share, from memory of common practice; they can only help, never decide alone.
"""

from __future__ import annotations

from functools import cache
from typing import NamedTuple

from drc_power.survey.families import FAMILIES
from drc_power.survey.patterns import compiled, one_of


class Clue(NamedTuple):
    """One row: where `pattern` (case ignored) is found in the text of `source`, `kind` gains `weight`."""

    source: str
    pattern: str
    kind: str
    weight: float
    words: str


def _rows(source: str, words: str, *entries: tuple[str, str, float]) -> tuple[Clue, ...]:
    return tuple(Clue(source, pattern, kind, weight, words) for kind, pattern, weight in entries)


REFERENCE = _rows(
    "reference", "reference letters",
    ("resistor", r"^(R|RES|RS|RSENSE|RSH|RL|RLOAD|RMEAS|RG|RESR|RCAN|SH|SHUNT)$", 2.0),
    ("resistor", r"^R[A-Z]+$", 0.5),
    ("resistor", r"^(RN|RP|RA)$", 1.5),
    ("thermistor", r"^(RT|TH|NTC|PTC|RTH)$", 2.0),
    ("potentiometer", r"^(RV|POT|VR|P)$", 1.0),
    ("tvs", r"^(RV|MOV|VDR|TVS|ESD)$", 1.0),
    ("capacitor", r"^C[A-Z]?$", 2.0),
    ("capacitor", r"^(CAP|CP|CV)$", 2.0),
    ("inductor", r"^(L|IND|CH)$", 2.0),
    ("ferrite", r"^(FB|FL|BEAD|FER)$", 2.0),
    ("diode", r"^(D|CR|DB|SD)$", 1.5),
    ("zener", r"^(Z|ZD|DZ|VZ)$", 2.0),
    ("tvs", r"^(TVS|DTVS)$", 1.5),
    ("led", r"^(LED|LD|DL|DS|LED[A-Z_]+)$", 2.0),
    ("bridge", r"^(BR|DB|GR)$", 1.5),
    ("mosfet", r"^(Q|T|TR|M|V)$", 0.75),
    ("bjt", r"^(Q|T|TR|V)$", 0.75),
    ("mosfet", r"^(FET|MOS|MOSFET|QN|QP)$", 2.5),
    ("fuse", r"^(F|FU|FUSE|PTC|RF)$", 2.0),
    ("connector", r"^(J|P|CN|CON|CONN|X|XS|XP|K|PL|SK|SV|TB|HDR|USB|JFP|BUS)$", 1.5),
    ("connector", r"^(CONN|USB|PWR|JACK|TERM)\w*$", 1.0),
    ("ic", r"^(U|IC|N|A|DD|DA)$", 1.0),
    ("relay", r"^(K|RL|RLY|REL|RE)$", 1.5),
    ("switch", r"^(S|SW|PB|BTN|KEY|SB|BUT|BOOT|RESET)$", 2.0),
    ("crystal", r"^(Y|X|XTAL|OSC|CR|Q|QZ)$", 0.75),
    ("crystal", r"^(Y|XTAL|OSC)$", 1.5),
    ("battery", r"^(BT|BAT|B|BATT)$", 1.0),
    ("net-tie", r"^(JP|SJ|NT|W|LK|LNK|JMP|JUMP|TIE|SB)$", 1.5),
    ("transformer", r"^(T|TR|TX|XFMR)$", 0.75),
    ("test-point", r"^(TP|TEST|PT)$", 3.0),
    ("mechanical", r"^(H|MH|MP|FID|HOLE|FTG|NUT|SCREW|WASHER|LOGO|HS|CAGE|PCB|MT|G|KK)$", 1.5),
    ("motor", r"^(M|MOT|MOTOR)$", 1.0),
    ("optocoupler", r"^(OK|OC|OPTO|ISO|PC)$", 1.5),
    ("linear-regulator", r"^(VR|REG|LDO)$", 1.5),
    ("switching-regulator", r"^(PS|DCDC|SMPS)$", 1.5),
    ("source", r"^(V|I|VIN|VDC)$", 0.5),
    ("speaker", r"^(LS|SPK|BZ|BUZ|SP)$", 2.0),
)

SYMBOL = _rows(
    "symbol", "symbol name",
    ("resistor", r"^R(_(Small|US|Network|Pack|Shunt)\w*)?(_|$)|^RES(ISTOR|$|_)|^R?SMALL$|^R\d{4}(_|$)|^RN\d|^R-|shunt", 4.0),
    ("resistor", r"heater|heating|^lamp(_|$)|peltier", 6.0),
    ("battery", r"solar_?cell", 5.0),
    ("thermistor", r"thermistor|^NTC|^PTC(_|$)", 5.0),
    ("potentiometer", r"^POT|potentiometer|trim", 5.0),
    ("tvs", r"varistor|^MOV", 9.0),
    ("capacitor", r"^C(P\d?|1)?(_|$)|^CAP|^CP?small$|^C\d{4}(_|$)|ctrim|^C-|^CPOL", 4.0),
    ("inductor", r"^L(_|$)|^IND|^L\d{4}|choke|inductor", 4.0),
    ("inductor", r"^L_(Core_)?Ferrite|^L_Iron", 5.0),
    ("ferrite", r"ferrite_?bead|bead|^FB|^BLM\d|_BLM\d{2}|^ferrite|^L_Ferrite_(Small|Bead)$", 5.0),
    ("diode", r"^D(IODE)?(_|$|SCH)|^D_(Small|Schottky|ALT)|schottky|^DIODE|^D-", 4.0),
    ("zener", r"zener|_ZEN|^BZ[XTV]", 9.0),
    ("tvs", r"(^|_)TVS|^ESD|transil|transorb", 9.0),
    ("led", r"(^|[_:])LED(_|$|S|:)|^LED", 6.0),
    ("bridge", r"D_Bridge|bridge.?rect|^(KBP|GBU|DF0|MB\d|DB10|ABS\d)", 6.0),
    ("mosfet", r"^Q_[NP]MOS|^[NP]MOS(FET)?(_|$)|mosfet|^Q_Dual_[NP]MOS|^[NP]-?(CH|FET)", 6.0),
    ("bjt", r"^Q_?(NPN|PNP)|^(NPN|PNP)(_|$|-)", 6.0),
    ("igbt", r"IGBT", 7.0),
    ("fuse", r"fuse|^FUSR|^PTC_|^F_", 5.0),
    ("connector", "^" + one_of(r"""CONN BUS HEADER HDR PINHD USB([-_ ]|\d|[ABC]$|MINI|MICRO|$) RJ\d BNC DB(9|15|25) DIN JACK TERMINAL XT\d0 JST MOLEX
        SAMTEC HARTING TB\d SUPP\d Bus_"""), 5.0),
    ("connector", r"conn_|[-_]conn|screw_terminal|barrel_?jack|receptacle|socket|audiojack|terminal|micro_?sd|sd_?card|sim_?card", 5.0),
    ("relay", r"solid_?state_?relay", 4.0),
    ("relay", r"relay|^G[256][A-Z]?-?\d?|^FINDER", 5.0),
    ("switch", r"^SW(_|$|ITCH)|push_?button|tact|^PB_|^BUTTON|^BTN|^SPDT|^SPST|^DPDT|switch_?inv|rotary.?enc", 5.0),
    ("crystal", r"crystal|resonator|^XTAL|oscillator|^OSC", 5.0),
    ("battery", r"^battery|batt.?hold|^CR20\d\d|^Battery_Cell", 5.0),
    ("net-tie", r"^net-?_?tie|(?<!0R_)jumper|^JP\d?|^SJ(_|\d|$)|short_?pad|^bridge_", 6.0),
    ("transformer", r"transformer|^XFMR|^trafo", 6.0),
    ("test-point", r"test_?p(oin|a)|testpad|probe_?pad", 6.0),
    ("mechanical", r"mounting_?hole|fiducial|logo|heat_?sink|^hole|plated_hole|housing|^screw(_|$)|shield_?can|graphic", 6.0),
    ("motor", r"^motor(_|$)|fan(_|$)", 5.0),
    ("optocoupler", r"opto|photo_?(coupler|tran)|^(PC817|TLP\d|6N13|4N\d\d|LTV|EL81|MOC3)", 5.0),
    ("source", r"^[VI](DC|SIN|PULSE|PWL|EXP|AM|SFFM|TRNOISE|TRRANDOM|SOURCE)(_|$|-)|voltage_?source|current_?source", 8.0),
    ("load-switch", r"load_?switch", 4.0),
    ("speaker", r"speaker|buzzer|^piezo", 5.0),
    ("ic", r"opamp|^LM358|^74\w{2,5}\d\d", 4.0),
)

LIBRARY = _rows(
    "library", "library name",
    ("linear-regulator", r"regulator_?linear|linear_?reg|^ldo", 6.0),
    ("switching-regulator", r"regulator_?switch|converter_(dcdc|acdc)|switching_?reg", 6.0),
    ("switching-regulator", r"regulator_(switchedcapacitor|controller)", 2.0),
    ("ic", r"regulator_(controller|current)|reference_voltage", 6.0),
    ("linear-regulator", r"^(.*[-_ ])?(voltage_)?regulators?$", 2.0),
    ("switching-regulator", r"^(.*[-_ ])?(voltage_)?regulators?$", 2.0),
    ("load-switch", r"power_management", 1.5),
    ("ic", r"power_management|power_supervisor|battery_management|supervisor", 2.0),
    ("mosfet", r"transistor_fet|mosfets?$", 5.0),
    ("bjt", r"transistor_bjt", 5.0),
    ("igbt", r"transistor_igbt", 6.0),
    ("mosfet", r"transistors?($|[-_ ])", 1.0),
    ("bjt", r"transistors?($|[-_ ])", 1.0),
    ("bridge", r"diode_bridge", 6.0),
    ("diode", r"^diodes?$|[-_ ]diodes?$", 2.5),
    ("tvs", r"power_protection|protection|(^|[-_])esd", 4.0),
    ("led", r"^leds?($|[-_ ])|[-_ ]leds?$", 3.0),
    ("gate-driver", r"driver_fet|gate_?driver", 6.0),
    ("ic", r"driver_(motor|led|display|haptic|relay)|motor_?driver", 5.0),
    ("ic", r"^((amplifier|analog|comparator|cpld|cpu|dsp|display|fpga|gpu|interface|logic|mcu|memory|rf|sensor|timer)(_(?!schlib)\w+)?|audio|video|4xxx(_\w+)?|74x\w+|potentiometer_digital)$", 4.0),
    ("ic", r"(logic|interface|analog & |microcontroller|processor|module)", 2.0),
    ("crystal", r"oscillator|crystal", 3.0),
    ("relay", r"^relays?($|[-_ ])", 6.0),
    ("connector", r"^conn(ector)?s?($|[-_ ])|[-_ ]conn(ector)?s?$", 4.0),
    ("switch", r"^switch(es)?($|[-_ ])|[-_ ]switch(es)?$", 3.0),
    ("net-tie", r"^jumpers?($|[-_ ])|net_?tie", 4.0),
    ("resistor", r"resistor", 3.0),
    ("capacitor", r"capacitor", 3.0),
    ("inductor", r"inductor", 3.0),
    ("transformer", r"transformer", 4.0),
    ("fuse", r"fuse", 3.0),
    ("optocoupler", r"^isolator$", 2.0),
    ("ic", r"^isolator", 1.0),
    ("mechanical", r"^mechanical$|fastener|graphic", 4.0),
    ("motor", r"^motor$", 4.0),
)

TEXT = _rows(
    "text", "description",
    ("mosfet", r"\bmosfet(?!.{0,14}driver)|[np]-?channel.{0,20}(fet|mos|trans)|hexfet|\b[np]mos\b", 4.0),
    ("bjt", r"\b(npn|pnp)\b|bipolar.{0,12}transistor|darlington", 4.0),
    ("igbt", r"\bigbt\b(?!.{0,14}driver)", 5.0),
    ("diode", r"\b(schottky|rectifier|switching|fast|general purpose|signal)\b.{0,20}diode|^diode|\bdiodes?\b(?!.{0,12}(driver|bridge|control))|recovery rectifier", 3.0),
    ("diode", r"\b(schottky|ultrafast|rectifier)\b(?!.{0,20}(bridge|controller|driver))", 1.5),
    ("bridge", r"diode bridge|bridge rectifier|rectifier bridge", 6.0),
    ("zener", r"\bzener\b", 8.0),
    ("tvs", r"\btvs\b|transient.{0,3}voltage.{0,3}suppress|\besd\b.{0,20}protect|varistor|surge suppress|voltage dependent resistor", 8.0),
    ("led", r"light.emitting|\bled\b(?!.{0,16}(driver|controller|backlight|supply))", 4.0),
    ("switching-regulator", r"\bpmic\b|power management (ic|unit)", 10.0),
    ("switching-regulator", r"(buck|boost|switch.?mode|switching|step.?down|synchronous).{0,30}charg", 10.0),
    ("linear-regulator", r"(linear|li-?ion|li-?po|lithium|battery).{0,24}charg|charge management controller|charger", 5.0),
    ("linear-regulator", r"\bldo\b|low.?drop.?out|linear (voltage )?regulator|(fixed|adjustable|positive|negative).{0,20}regulator(?!.{0,20}switch)|\d+ ?m?A.{0,12}(voltage )?regulator|ddr termination", 5.0),
    ("switching-regulator", r"\b(buck|boost|sepic|step.?(up|down)|switch(ing|ed|mode)?.?(mode)?|flyback|charge pump)\b.{0,40}(regulator|converter|inverter)|simple switcher|dc.?[-/]?dc (converter|module|step|buck|boost)|power (module|stage)|isolated dc", 6.0),
    ("switching-regulator", r"\breg(ulator)?\b.{0,12}\b(buck|boost|step|switch)|\b(buck|boost)\b.{0,6}\breg", 5.0),
    ("ic", r"\b(buck|boost|pwm|flyback|switching|mppt|step.?down|step.?up|dc.?dc)\b.{0,30}controller|controller.{0,30}(buck|boost|external)", 4.0),
    ("load-switch", r"load switch|power.{0,14} switch|high.?side.{0,12}switch|hot.?swap|e-?fuse|ideal diode(?!.{0,16}controller)|current.limit(ed|ing).{0,10}switch|usb power|smart switch", 5.0),
    ("gate-driver", r"(gate|mosfet|igbt|fet|half.?bridge|bridge|high.?side|low.?side).{0,24}driver(?!.{0,24}(with|integrated) (fet|mosfet))", 5.0),
    ("fuse", r"\bfuse\b|polyfuse|polymeric|resettable", 5.0),
    ("ferrite", r"ferrite(?!.{0,6}core)|\bbead\b", 5.0),
    ("inductor", r"\binductor\b|\bchoke\b", 4.0),
    ("transformer", r"\btransformer\b", 5.0),
    ("resistor", r"\bresistor\b(?!.{0,16}(transistor|capacitor))|resistor network|current sense resistor|shunt resistor", 4.0),
    ("thermistor", r"thermistor|temperature dependent resistor", 6.0),
    ("potentiometer", r"potentiometer|variable resistor|trimmer", 6.0),
    ("capacitor", r"\bcapacitor\b", 4.0),
    ("connector", r"\bconnector\b|receptacle|\bheader\b|terminal block|screw terminal|\bjack\b|\bsocket\b", 4.0),
    ("relay", r"\brelay\b(?!.{0,14}driver)", 5.0),
    ("switch", r"push.?button|\b(dip|slide|toggle|tactile|rotary) switch|switch,|\bspst\b|\bspdt\b", 4.0),
    ("crystal", r"\bcrystal\b|oscillator|resonator", 4.0),
    ("battery", r"\bbattery\b(?!.{0,30}(charg|manag|monitor|protect|gauge|connector|control))|single.cell battery", 4.0),
    ("net-tie", r"net tie|\bjumper\b", 5.0),
    ("test-point", r"test ?point", 5.0),
    ("mechanical", r"mounting hole|fiducial|heat ?sink|\bnut\b", 5.0),
    ("motor", r"^(dc )?motor\b|\bfan\b(?!.{0,14}(controller|driver))", 4.0),
    ("optocoupler", r"opto.?(coupler|isolator|transistor)|photo.?(coupler|mos)|solid state relay", 5.0),
    ("source", r"(voltage|current) source,? (symbol|dc|pulse|sin|for sim)?", 5.0),
    ("speaker", r"\bspeaker\b|buzzer", 4.0),
    ("ic", r"\b" + one_of(r"""op.?amp operational.amplifier eeprom flash sram memory microcontroller mcu fpga cpld transceiver translator buffer
        inverter.gate logic multiplexer shift.register counter sensor accelerometer adc dac converter,.\d+.bit codec comparator supervisor reset
        timer expander uart bridge.controller hub phy module monitor fuel.gauge protection.ic amplifier isolator rtc clock""") + r"\b", 3.0),
    ("ic", r"voltage reference|shunt regulator|motor driver|stepper|h-?bridge|bldc|esd.protected|led driver", 4.0),
    ("ic", r"battery.{0,24}(manag|monitor|protect|gauge)", 4.0),
)

FOOTPRINT = _rows(
    "footprint", "footprint",
    ("resistor", r"^resistor_|:R_(\d{4}|Axial|Box|Shunt|Array|Cat)|:RES[CM]?\d|\bR\d{4}\b|:R\d{4}", 2.0),
    ("capacitor", r"^capacitor_|:CP?_|:CAP[CM]?|\d{4}_C\b", 2.0),
    ("inductor", r"^inductor_|:L_|:IND|choke", 2.0),
    ("diode", r"^diode_|:D_(SM|SOD|DO|PowerDI|MELF|Mini)|:SOD|:DIO|:SM[ABC](\b|_)|:DO-?\d", 2.0),
    ("led", r"^led_|:LED", 3.0),
    ("bridge", r"diode_bridge", 4.0),
    ("fuse", r"^fuse|:fuse|fuse_?holder|:FUSR", 3.0),
    ("connector", r"^connector|pinheader|pinsocket|terminal_?block|^jst|:JST|:USB|:conn|barrel_?jack|:XT\d0|banana|dsub|:molex|:amass", 3.0),
    ("crystal", r"^(crystal|oscillator)|:crystal|:xtal", 3.0),
    ("test-point", r"^test_?point|:test_?p", 4.0),
    ("mechanical", r"^(mounting_?hole|fiducial|symbol|heatsink)|:(mounting_?hole|fiducial)|:MTG", 4.0),
    ("relay", r"^relay|:relay", 4.0),
    ("switch", r"^button_switch|:SW_|:PB_|:switch", 3.0),
    ("transformer", r"^transformer|:XFMR|:transformer", 4.0),
    ("potentiometer", r"^potentiometer|:pot|:RV\d", 4.0),
    ("battery", r"^battery|:battery", 4.0),
    ("net-tie", r"^(jumper|net_?tie)|:solder_?jumper|:net_?tie", 4.0),
    ("ic", r":(L?QFP|TQFP|QFN|VQFN|WQFN|BGA|TSSOP|SSOP|DIP|LGA|PLCC|PQFP|SOIC-(14|16|18|20|24|28))|^package_(qfp|bga|dip|csp|lga)|^rf_module", 1.0),
    ("speaker", r"buzzer|speaker", 3.0),
    ("optocoupler", r"optodevice", 2.0),
    ("motor", r"\bmotor\b", 1.0),
)

MODEL = _rows(
    "model", "simulation model",
    ("resistor", r"^R$", 6.0), ("capacitor", r"^C$", 6.0), ("inductor", r"^L$", 6.0), ("diode", r"^D$", 3.0),
    ("mosfet", r"^(NMOS|PMOS|NJFET|PJFET)$", 8.0), ("bjt", r"^(NPN|PNP)$", 8.0), ("source", r"^[VI]$", 8.0),
    ("switch", r"^SW$", 6.0),
)

CLUES: tuple[Clue, ...] = (
    REFERENCE + SYMBOL + LIBRARY + TEXT + FOOTPRINT + MODEL
    + tuple(Clue("value", f.pattern, f.kind, f.weight, "part number") for f in FAMILIES)
)


@cache
def by_source(source: str) -> tuple[Clue, ...]:
    """The rows of one source."""
    return tuple(clue for clue in CLUES if clue.source == source)


def matching(source: str, text: str) -> tuple[Clue, ...]:
    """The rows of `source` whose pattern occurs in `text`.

    >>> [clue.kind for clue in matching("symbol", "Q_NMOS_GDS")]
    ['mosfet']
    """
    return tuple(clue for clue in by_source(source) if compiled(clue.pattern).search(text)) if text else ()

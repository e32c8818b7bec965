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

import re
from functools import cache
from typing import NamedTuple


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
    ("thermistor", r"thermistor|^NTC|^PTC(_|$)", 5.0),
    ("potentiometer", r"^POT|potentiometer|trim", 5.0),
    ("tvs", r"varistor|^MOV", 9.0),
    ("capacitor", r"^C(P\d?|1)?(_|$)|^CAP|^CP?small$|^C\d{4}(_|$)|ctrim|^C-|^CPOL", 4.0),
    ("inductor", r"^L(_|$)|^IND|^L\d{4}|choke|inductor", 4.0),
    ("inductor", r"^L_(Core_)?Ferrite|^L_Iron", 5.0),
    ("ferrite", r"ferrite_?bead|bead|^FB|^BLM\d|_BLM\d{2}|^ferrite|^L_Ferrite_(Small|Bead)$", 5.0),
    ("diode", r"^D(IODE)?(_|$|SCH)|^D_(Small|Schottky|ALT)|schottky|^DIODE|^D-", 4.0),
    ("zener", r"zener|^BZ[XTV]", 9.0),
    ("tvs", r"(^|_)TVS|^ESD|transil|transorb", 9.0),
    ("led", r"(^|[_:])LED(_|$|S|:)|^LED", 6.0),
    ("bridge", r"D_Bridge|bridge.?rect|^(KBP|GBU|DF0|MB\d|DB10|ABS\d)", 6.0),
    ("mosfet", r"^Q_[NP]MOS|^[NP]MOS(FET)?(_|$)|mosfet|^Q_Dual_[NP]MOS|^[NP]-?(CH|FET)", 6.0),
    ("bjt", r"^Q_?(NPN|PNP)|^(NPN|PNP)(_|$|-)", 6.0),
    ("igbt", r"IGBT", 7.0),
    ("fuse", r"fuse|^FUSR|^PTC_|^F_", 5.0),
    ("connector", r"^(CONN|BUS|HEADER|HDR|PINHD|USB(?!LC)|RJ\d|BNC|DB(9|15|25)|DIN|JACK|TERMINAL|XT\d0|JST|MOLEX|SAMTEC|HARTING)|conn_|screw_terminal|barrel_?jack|receptacle|^Bus_|[-_]conn|socket|audiojack|^TB\d|^SUPP\d|terminal", 5.0),
    ("relay", r"relay|^G[256][A-Z]?-?\d?|^FINDER", 5.0),
    ("switch", r"^SW(_|$|ITCH)|push_?button|tact|^PB_|^BUTTON|^BTN|^SPDT|^SPST|^DPDT|switch_?inv|rotary.?enc", 5.0),
    ("crystal", r"crystal|resonator|^XTAL|oscillator|^OSC", 5.0),
    ("battery", r"^battery|batt.?hold|^CR20\d\d|^Battery_Cell", 5.0),
    ("net-tie", r"^net-?_?tie|jumper|^JP\d?|^SJ(_|\d|$)|short_?pad|^bridge_", 6.0),
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
    ("relay", r"^relays?($|[-_ ])", 5.0),
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
    ("bridge", r"diode bridge|bridge rectifier|rectifier bridge", 6.0),
    ("zener", r"\bzener\b", 8.0),
    ("tvs", r"\btvs\b|transient.{0,3}voltage.{0,3}suppress|\besd\b.{0,20}protect|varistor|surge suppress|voltage dependent resistor", 8.0),
    ("led", r"light.emitting|\bled\b(?!.{0,16}(driver|controller|backlight|supply))", 4.0),
    ("switching-regulator", r"\bpmic\b|power management (ic|unit)", 10.0),
    ("switching-regulator", r"(buck|boost|switch.?mode|switching|step.?down|synchronous).{0,30}charg", 10.0),
    ("linear-regulator", r"(linear|li-?ion|li-?po|lithium|battery).{0,24}charg|charge management controller|charger", 5.0),
    ("linear-regulator", r"\bldo\b|low.?drop.?out|linear (voltage )?regulator|(fixed|adjustable|positive|negative).{0,20}regulator(?!.{0,20}switch)|\d+ ?m?A.{0,12}(voltage )?regulator|ddr termination", 5.0),
    ("switching-regulator", r"\b(buck|boost|sepic|step.?(up|down)|switch(ing|ed|mode)?.?(mode)?|flyback|charge pump)\b.{0,40}(regulator|converter|inverter)|simple switcher|dc.?[-/]?dc (converter|module|step|buck|boost)|power (module|stage)|isolated dc", 5.0),
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
    ("ic", r"op.?amp|operational amplifier|\b(eeprom|flash|sram|memory|microcontroller|mcu|fpga|cpld|transceiver|translator|buffer|inverter gate|logic|multiplexer|shift register|counter|sensor|accelerometer|adc|dac|converter, \d+.bit|codec|comparator|supervisor|reset|timer|expander|uart|bridge controller|hub|phy|module|monitor|fuel gauge|protection ic|amplifier|isolator|rtc|clock)\b", 3.0),
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

VALUE = _rows(
    "value", "part number",
    ("linear-regulator", r"(^|[^\d])(LM|UA|MC|L|KA|LD|NCP|MIC|AZ|TS|NJM|BA|CJ|HT|WS)?7[89][LMTN]?\d\d([A-Z]|$|[-_ ])", 4.0),
    ("linear-regulator", r"\b\w{0,6}1117|(LM|LT|UA)\d?3(17|37|38|50)\b|LM3(17|37)|LM1084|LT108[3-6]|LT1(129|521|763|764|962|963)|LT30\d\d|LP298\d|LP38\d|LP59\d\d|LM29(31|36|40|41)|MIC(29|37|39|52|53|55)\d|AP(2112|2114|2127|2204|2210|7333|7361|7365|7380)|MCP17(00|02|03|54|55|90|92)|MCP18\d\d|XC62\d\d|HT7[1-8]\d\d|TPS7\d\d|TLV7(0|1|3|4|5|6|7)\d|ADP1[2567]\d|ADM71|RT9(0|1)\d\d|SPX(38|58|29)|NCP(11|16|40|51|55|56|57|58|69)\d|LD(39|59|L1|K1|FM)\d|ME6\d\d\d|S-?1[12]\d\d|TC1(0|1|2)\d\d|ISL80\d|BA\d\dBC|TCR\d|L78\d\d|L4940|MAX(1658|1793|8887|8510|8511)|TPS51200|TPS748\d|XC6206|SGM20\d|RP1\d\d", 3.5),
    ("linear-regulator", r"^(MCP738\d\d|TP40[57]\d|TP5400|LTC405\d|LTC406\d|BQ2(10|40[2-9]|407|423)\w*|MAX1(555|811)|STC405\d|ME405\d|CN3\d{3}|LTH7|XT2052)", 5.0),
    ("switching-regulator", r"\bLM(25[79]\d|2678|2671|2676|267\d|2734|2840|22\d{3}|43[67]\d\d|5(00|01|16|57|60)\d{1,2})\b|LM259\d|LM257\d|LMR\d{5}|LMZ\w?\d|TPS5[46]\w?\d{2,4}|TPS6[0-3]\w?\d{2,4}|TPS82\d\d|TPS84\d|MP(1[45]|2[0-9]|44|86)\d\d|MT3608|XL(40|60|15|70)\d\d|SY8\d{3}|RT(6|8)\d{3}|AP(3|6[25])\d{3,4}|AP1509|AP150\d|ADP(2[13]|5)\d{2,3}|L5973|L597\d|ST1S|MCP16(0|2|3|4)\d|MC34063|MC33063|LT(13|17|19|30|34|36|37|80|83|86)\d\d\b|LTC(1877|3[1-6]\d\d|3780(?!))|LTM\d{4}|MAX(150|1[67]\d|756|8)\d{1,3}|TDA215\d|TDA21[24]\d|IR38\d\d|IRPS5401|NCP(1529|3020|3170|63\d\d)|ICL7660|LM2662|LM828|TPS6040|TC7660|R-?78\w|OKI-78|TSR ?\d|V78\d\d|TEC ?\d|MEE?1S|SY72\d|XC9\d\d|AOZ1\d|TLV62\d|PAM23\d|NCP34\d|RT57\d|MPM\d", 3.0),
    ("mosfet", r"^(IR(F|L|FZ|FP|FB|FS|FH|LB|LML|LR|FR)\d?\w*\d|BSS\d+|BSC\d|BSZ\d|IP[ABDPTW]\d|2N700\d|BS170|BS250|AO[NDTIU]?[0-9]\d{2,4}|SI[0-9A-Z]\d{3}|SIR\d|SIS\w?\d|SQ[JDM]?\w?\d|DM[NPGT]\w?\d|CSD[1-8]\d|PSMN\w|BUK\w|FD[BCDMNPSV]\w?\d|FQ[APDBU]\w*\d|NT[DMRPJAZF]\w+\d|STP\d|STD\d|STB\d|STL\d|STH\w?\d|TPH\w|TK\d|RJK\d|VN\d{3,4}|VP\d{3,4}|TP0610|FS?8205|GS-?\d|EPC2\d|SCT\d|IMW|IPT\d|HUF|RFP\d|RFD\d|MTP\d|NDS\d|NDP\d|PMV\d|PMN\d|PMZ\w?\d|SSM\d|RU[EFMC]\d|WPM\d|LP\d{4}LT|CJ[23]\d{3}|DTU?S?\d{4}|NCE\w?\d|WSD\w?\d|WST\w?\d|HY\d{4}|CRSS|SUD\d|SUP\d|SUM\d|BSP\d{2,3}(?!5[0-6])|BUZ\d|SPP\d|IXF|IXT|APT\d|TSM\d)", 3.5),
    ("bjt", r"^(Q?2N(2222|2907|390[46]|440[13]|505\d|555\d|540\d|3055|3019|3773|6\d{3})|BC\d{3}|BC[PVXW]\w?\d|BD\w?\d{2,3}|BF\d{3}|BU\d{3}|MMBT\w*\d|MMST\w?\d|PMBT|MJ[EDL]?\d|TIP\d|2S[ABCD]\d|S8050|S8550|S901\d|SS8[05]50|PZT\w*\d|FZT\d|ZTX\d|ZXT\w?\d|FMMT\d|MPSA\d|KSC\d|KSA\d|NJW\d|NSS\d|PBSS\d|DT[ACD]\d|MUN\d|390[46]$|ULN2\d{3}L?$)", 3.5),
    ("ic", r"^ULN2[08]\d\d", 4.0),
    ("diode", r"^(1N(400\d|4148|4448|540\d|58[12]\d|914|4150|6263)\w*|SS\d{2,3}\w*|SK\d{2,3}|SB\d{3,4}|SR\d{3}|B\d{3}[A-Z]?|MBR\w*\d|BA[TVSWR]\d+\w*|BAT\d|ES\d[A-J]|US\d[A-M]|RS\d[A-M]|S\d[A-M](B|C|L)?$|M[1-7]$|UF\d{4}|STPS\w*\d|STTH\w*\d|PMEG\w*\d|RB\d{3}\w*|HER\d|FR\d{3}|MUR\w*\d|MURS|V\d+P\d+|VS-?\d|SD\d{3}|CDBA?|DSS\d|LL4148|BYV|BYT|BYW|STPSC\w*|C3D\d|PMEG|CUS\d|SDM\d|DFLS\d|SBR\d|NRVB|SMD\d{2}$|GF1|SCS\d|NSR\d|ZLLS)", 3.5),
    ("bridge", r"^(KBP\w?\d|GBU\d|GBJ|DF\d{2}|MB\d+S|DB10\d|ABS\d|2W\d\d|W0\dM?|KBU\d|KBPC|HD\d\d|TS\d{3}S?$|B\d+[CR]\d{4})", 4.0),
    ("zener", r"^(BZ[XVTDG]\d*\w*|MM[SB]?Z\w*\d|1N47\d\d\w*|1N52\d\d\w*|1N53\d\d\w*|DDZ|PZU|ZMM|ZPD|UDZ|SMAZ|LM4040|LM385|TZ\w?\d)", 4.5),
    ("tvs", r"^(SM[ABCDF]J\d|SMF\d|P[46]KE\d|P[46]SMA|1[.,]5KE|1[.,]5SMC|5KP|PESD|ESD\w*\d|USBLC|PRTR|SM712|SP0\d|SP[34]\d|TPD\d|D5V0|RCLAMP|SMDJ|5[.,]0SMDJ|SRV05|0402ESD|NUP\d|TVS|IP4\d{3}|CDSOT|GBLC|ESDA|SZNUP|SM24CAN|LC03|SL[DV]\d|\d{2}D\d{3}K|\d{2}E\d{3}K|VDR)", 4.5),
    ("ferrite", r"BLM\d\d|MPZ\d|MMZ\d|HZ\d{4}|HI\d{4}|FBM\w|\d+\s*[RΩ]\s*@\s*\d+|\d+\s*ohm\w*\s*@|@\s*100\s*MHz|742792|FB\d{4}|bead|^ferrite|^FB_", 4.5),
    ("fuse", r"polyfuse|\bPTC\b|resettable|MF-?(R|MSM|NSM|USM|PSM)|nano2?smd|0ZC[A-Z]|^FUSE|FUSR|1812L\d|0603L\d|1206L\d|RXEF|^RUEF|^\d+(\.\d+)?A? ?(fast|slow|T|FF)$", 3.0),
    ("load-switch", r"^(TPS(20[1-9]\d|22\d{2,3}|25[0-9]\d+|2[0-9]{3}\w?|1[HS]\w+)|AP2(1[4-9]|2[2-9]|8)\d\w*|AP22\d{2,3}|MIC20\d\d|MIC25\d\d|SIP32\d|STMPS2\d|SY628\d|SLG5\w|NCP3(3|6|7|8)\d|FPF\d|RT97\d\d|TPS272\w|BTS\d|BTF\d|VN[QDI5]?\d\w*E|PROFET|ITS\d|LTC43(5[0-9]|6\d|7\d)(?!)|NCV84|AUIPS|IPS\d|MAX4995|STEF\d|TPS259\d|MP50\d\d|KTS1\d|DML30|TCK\d|NX5P|G51\d|GLF\d)", 3.5),
    ("gate-driver", r"^(IR2[01]\d\d|IRS2\d|LM510[0-9]|UCC2[0-9]\d{3}|TC44\d|MCP14\w?\d|FAN73\d|FAN3\d|L638\d|L639\d|LTC444|MIC44|EG2\d|EG3\d|HIP40|HIP2\d|DRV83(01|02|03|05|23|53)|ISL\d{4}6|IXD\d|NCP51\d|NCP30\d|2ED\d|1ED\w?\d|6ED\d|SI827|SI823|ADUM4223|TPS28\d|MAX5[0-9]{2}[45]|FD6288|TF2\d{3})", 4.0),
    ("ic", r"^(DRV8(8|4|7)\d\d|L29[38]|L62\d\d|A49\d\d|TMC\d{4}|TB6\d|VNH\d|BTN\d|BTS79|STSPIN|TPA\d|TDA(7|20|2[0-9])\d\d|LM(3886|4780|1875|386)|MAX98\d|PAM8|IRS20957|TAS\d|MAX7219|LT3750|INA\d|ACS7\d\d|ATMEGA|STM32|ESP\d|PIC\d|LPC\d|RP2|NRF|SAM[DE]|TL43\d|LM43[12]|REF\d|LT1[04]\d\d|NE5\d\d|LM3[135]\d|TL0\d\d|LTC41\d\d|BQ7\d{4}|BQ27\d{3}|MAX1\d{3,4}|74\w*\d|CD4\d{3}|LM5069|LTC43\d\d|LM74\d\d|LM5050|LTC78\d\d|LM511\d|LM51\d\d|LM34\d\d|UC[23]\d{3}|TL494|SG35\d|LTC3[78]\d\d|ISL8\d|TPS40\d|TPS43\d|LM27\d\d|LM3[01]\d\d|RT8\d20|MAX150)", 2.5),
)

MODEL = _rows(
    "model", "simulation model",
    ("resistor", r"^R$", 6.0), ("capacitor", r"^C$", 6.0), ("inductor", r"^L$", 6.0), ("diode", r"^D$", 3.0),
    ("mosfet", r"^(NMOS|PMOS|NJFET|PJFET)$", 8.0), ("bjt", r"^(NPN|PNP)$", 8.0), ("source", r"^[VI]$", 8.0),
    ("switch", r"^SW$", 6.0),
)

CLUES: tuple[Clue, ...] = REFERENCE + SYMBOL + LIBRARY + TEXT + FOOTPRINT + VALUE + MODEL


@cache
def compiled(pattern: str) -> re.Pattern[str]:
    """The pattern, ignoring case; compiled where it is first needed, because start-up time counts."""
    return re.compile(pattern, re.IGNORECASE)


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

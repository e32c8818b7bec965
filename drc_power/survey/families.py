r"""Families of part numbers that the trade shares, by kind: a sign of what a part is, never the only one.

Each entry is the start of a part number, written as a regular expression without anchors: `\d` is a digit, `\w` any
letter or digit. From memory of common practice. A number begins at the start of the text or after a mark.
"""

from __future__ import annotations

from typing import NamedTuple


class Family(NamedTuple):
    """Part numbers that match `pattern` speak for `kind` with `weight`."""

    kind: str
    weight: float
    pattern: str


def _starting(kind: str, weight: float, words: str) -> Family:
    return Family(kind, weight, rf"^(?:{'|'.join(words.split())})")


def _anywhere(kind: str, weight: float, words: str) -> Family:
    return Family(kind, weight, rf"(?:^|[^A-Z0-9])(?:{'|'.join(words.split())})")


FAMILIES: tuple[Family, ...] = (
    Family("linear-regulator", 4.0, r"(^|[^\d])(LM|UA|MC|L|KA|LD|NCP|MIC|AZ|TS|NJM|BA|CJ|HT|WS)?7[89][LMTN]?\d\d([A-Z]|$|[-_ ])"),
    Family("linear-regulator", 3.5, r"\b\w{0,6}1117"),
    _anywhere("linear-regulator", 3.5, r"""
        LM3[1357][78] LM350 LM338 LT317 LM1084 LM1085 LM1086 LT108[3-6] LT158\d LT1(129|521|761|762|763|764|962|963) LT30\d\d
        LP298\d LP38\d LP59\d\d LM29(31|36|40|41) MIC(29|37|39|52|53|55)\d AP(2112|2114|2127|2204|2210|7333|7361|7365|7380)
        MCP17(00|02|03|54|55|90|92) MCP18\d\d XC62\d\d 6206 HT7[1-8]\d\d TPS7\d\d TLV7[0134567]\d ADP1[2567]\d ADM71 RT9[01]\d\d
        SPX(38|58|29) NCP(11|16|40|51|55|56|57|58|69)\d LD(39|59|L1|K1|FM)\d ME6\d\d\d S-?1[12]\d\d TC1[012]\d\d BA\d\dBC TCR\d L4940
        MAX(1658|1793|8887|8510|8511) TPS51200 TPS748\d SGM20\d RP1\d\d"""),
    _starting("linear-regulator", 5.0, r"""
        MCP738\d\d TP40[57]\d TP5400 LTC405\d LTC406\d BQ2(10|40[2-9]|407|423)\w* MAX1(555|811) STC405\d ME405\d CN3\d{3} LTH7 XT2052"""),
    _anywhere("switching-regulator", 3.0, r"""
        LM25[79]\d LM267\d LM2734 LM2840 LM22\d{3} LM43[67]\d\d LM5(00|01|16|57|60)\d{1,2} LMR\d{5} LMZ\w?\d TPS5[46]\w?\d{2,4}
        TPS6[0-3]\w?\d{2,4} TPS8[24]\d\d TLV62\d MP(1[45]|2[0-9]|44|86)\d\d MPM\d MT3608 XL(40|60|15|70)\d\d SY[78]\d{3} RT[68]\d{3} RT57\d
        AP3\d{3,4} AP6[25]\d{3,4} AP150\d ADP(2[13]|5)\d{2,3} L597\d ST1S MCP16[0234]\d MC3[34]063 LT(13|17|19|34|36|37|80|83|86)\d\d
        LTC1877 LTC3[1-6]\d\d LTM\d{4} MAX150\d{1,3} MAX1[67]\d\d{1,3} TDA21[245]\d IR38\d\d IRPS5401 NCP(1529|3020|3170|63\d\d) NCP34\d
        ICL7660 LM2662 LM828 TPS6040 TC7660 R-?78\w OKI-78 TSR\d V78\d\d TEC\d MEE?1S XC9\d\d AOZ1\d PAM23\d"""),
    _starting("mosfet", 3.5, r"""
        IR(F|L|FZ|FP|FB|FS|FH|LB|LML|LR|FR)\d?\w*\d BSS\d+ BSC\d BSZ\d IP[ABDPTW]\d 2N700\d BS170 BS250 AO[NDTIU]?[0-9]\d{2,4}
        SI[0-9A-Z]\d{3} SIR\d SIS\w?\d SQ[JDM]?\w?\d DM[NPGT]\w?\d CSD[1-8]\d PSMN\w BUK\w FD[BCDMNPSV]\w?\d FQ[APDBU]\w*\d
        NT[DMRPJAZF]\w+\d ST[PDBL]\d STH\w?\d TPH\w TK\d RJK\d VN\d{3,4} VP\d{3,4} TP0610 FS?8205 GS-?\d EPC2\d SCT\d C[23]M\d{7} IMW IPT\d
        HUF RFP\d RFD\d MTP\d NDS\d NDP\d PMV\d PMN\d PMZ\w?\d SSM\d RU[EFMC]\d WPM\d CJ[23]\d{3} DTU?S?\d{4} NCE\w?\d WS[DT]\w?\d
        HY\d{4} CRSS SU[DPM]\d BSP\d{2,3} BUZ\d SPP\d IXF IXT APT\d TSM\d{3}[NP]"""),
    _starting("bjt", 3.5, r"""
        Q?2N(2222|2907|390[46]|440[13]|505\d|555\d|540\d|3055|3019|3773|6\d{3}) BC\d{3} BC[PVXW]\w?\d BD\d{3}(?!\d) BF\d{3} BU\d{3} MMBT\w*\d
        MMST\w?\d PMBT MJ[EDL]?\d TIP\d 2S[ABCD]\d S8050 S8550 S901\d SS8[05]50 PZT\w*\d FZT\d ZTX\d ZXT\w?\d FMMT\d MPSA\d KSC\d KSA\d
        NJW\d NSS\d PBSS\d DT[ACD]\d MUN\d 390[46]$"""),
    _starting("diode", 3.5, r"""
        1N400\d 1N4148 1N4448 1N540\d 1N58[12]\d 1N914 1N4150 1N6263 SS\d{2,3} SK\d{2,3} SB\d{3,4} SR\d{3} B\d{3}[A-Z]?$ MBR\w*\d
        BA[TVSWR]\d+ ES\d[A-J] US\d[A-M] RS\d[A-M] S\d[A-M][BCL]?$ M[1-7]$ UF\d{4} STPS\w*\d STTH\w*\d PMEG\w*\d RB\d{3} HER\d FR\d{3}
        MUR\w*\d V\d+P\d+ VS-?\d SD\d{3} CDBA? DSS\d LL4148 BYV BYT BYW C3D\d CUS\d SDM\d DFLS\d SBR\d NRVB SMD\d{2}$ GF1 SCS\d NSR\d ZLLS"""),
    _starting("bridge", 4.0, r"KBP\w?\d GBU\d GBJ DF\d{2} MB\d+S DB10\d ABS\d 2W\d\d W0\dM? KBU\d KBPC HD\d\d B\d+[CR]\d{4}"),
    _starting("zener", 6.5, r"""
        BZ[XTVDG]\d*\w* MM[SB]?Z\w*\d 1N47\d\d 1N52\d\d 1N53\d\d DDZ PZU ZMM ZPD UDZ SMAZ LM4040 LM385 TZ\w?\d"""),
    _starting("tvs", 6.5, r"""
        SM[ABCDF]J\d SMF\d P[46]KE\d P[46]SMA 1[.,]5KE 1[.,]5SMC 5KP PESD ESD\w*\d USBLC PRTR SM712 SP0\d SP[34]\d TPD\d D5V0 RCLAMP SMDJ
        5[.,]0SMDJ SRV05 0402ESD NUP\d TVS IP4\d{3} CDSOT GBLC ESDA SZNUP SM24CAN LC03 SL[DV]\d \d{2}[DE]\d{3}K VDR TSM\d{2}A"""),
    Family("ferrite", 4.5, r"BLM\d\d|MPZ\d|MMZ\d|HZ\d{4}|HI\d{4}|FBM\w|\d+\s*[RΩ]\s*@\s*\d+|\d+\s*ohm\w*\s*@|@\s*100\s*MHz|742792|FB\d{4}|bead|^ferrite|^FB_"),
    Family("fuse", 3.0, r"polyfuse|\bPTC\b|resettable|MF-?(R|MSM|NSM|USM|PSM)|nano2?smd|0ZC[A-Z]|^FUSE|FUSR|1812L\d|0603L\d|1206L\d|RXEF|^RUEF|^\d+(\.\d+)?A? ?(fast|slow|T|FF)$"),
    _starting("load-switch", 3.5, r"""
        TPS20[1-9]\d TPS22\d{2,3} TPS25[0-9]\d+ TPS1[HS]\w+ TPS272\w AP2(1[4-9]|2[2-9]|8)\d\w* AP22\d{2,3} MIC20\d\d MIC25\d\d SIP32\d STMPS2\d
        SY628\d SLG5\w NCP3[3678]\d FPF\d RT97\d\d BTS\d BTF\d VN[QDI5]?\d\w*E PROFET ITS\d LTC43(5[0-9]|6\d|7\d) NCV84 AUIPS IPS\d MAX4995
        STEF\d MP50\d\d KTS1\d DML30 TCK\d NX5P G51\d GLF\d"""),
    _starting("gate-driver", 4.0, r"""
        IR2[01]\d\d IRS2\d LM510[0-9] UCC2[0-9]\d{3} TC44\d MCP14\w?\d FAN73\d FAN3\d L638\d L639\d LTC444 MIC44 EG2\d EG3\d HIP40 HIP2\d
        DRV83(01|02|03|05|23|53) ISL\d{4}6 IXD\d NCP51\d NCP30\d 2ED\d 1ED\w?\d 6ED\d SI827 SI823 ADUM4223 TPS28\d MAX5[0-9]{2}[45] FD6288 TF2\d{3}"""),
    _starting("ic", 4.0, r"ULN2[08]\d\d"),
    _starting("ic", 2.5, r"""
        DRV8[478]\d\d L29[38] L62\d\d A49\d\d TMC\d{4} TB6\d VNH\d BTN\d BTS79 STSPIN TPA\d TDA7\d\d TDA2\d\d\d LM(3886|4780|1875|386) MAX98\d
        PAM8 IRS20957 TAS\d MAX7219 LT3750 INA\d ACS7\d\d ATMEGA STM32 ESP\d PIC\d LPC\d RP2 NRF SAM[DE] TL43\d LM43[12] REF\d LT1[04]\d\d
        NE5\d\d LM3[135]\d TL0\d\d LTC41\d\d BQ7\d{4} BQ27\d{3} MAX1\d{3,4} 74\w*\d CD4\d{3} LM5069 LTC43\d\d LM74\d\d LM5050 LTC78\d\d
        LM511\d LM51\d\d LM34\d\d UC[23]\d{3} TL494 SG35\d LTC3[78]\d\d ISL8\d TPS40\d TPS43\d LM27\d\d LM3[01]\d\d RT8\d20"""),
)

"""Every printed figure that the service does not round to, and every figure that is not compared; with the reason."""

# By row: the service's figure lies within one printed step but does not round to the printed one.
CUT = {
    "LB-2011-C63": "230/630 = 0.3651, printed 0.36: table cut",
    "FF-2011-C63-63": "0.8 of the cut 0.36",
    "LF-2008-16-0.4s": "230/85 = 2.7059, printed 2.70: table cut",
    "LF-2008-BS_3036-15-0.4s": "230/90 = 2.5556, printed 2.55: table cut",
    "LF-2011-BS_3036-15-0.4s": "230/90 = 2.5556, printed 2.55: table cut",
    "LF-2011-BS_3036-30-0.4s": "230/210 = 1.0952, printed 1.09: table cut",
    "LF-2011-BS_88-3-5-0.4s": "230/22 = 10.4545, printed 10.4: table cut",
    "FF-2011-BS_3036-15-0.4s": "0.8 of the cut 2.55",
    "FF-2011-BS_3036-30-0.4s": "0.8 of the cut 1.09",
    "FF-2015-BS_88-3-32-0.4s": "0.8 x 0.91 = 0.728, printed 0.72: rounded down by its source",
    "LF-iec-10-5s": "printed from 46 A; the gate of IEC 60269-1 as held is 46.5 A, the cautious side",
    "LF-iec-16-5s": "230/65 = 3.538, printed 3.6: rounded up to one decimal",
    "LF-iec-25-0.4s": "230/183 = 1.2568, printed 1.25: table cut",
    "LF-iec-32-0.4s": "230/275 = 0.8364, printed 0.83: table cut",
    "LF-iec-63-5s": "230/320 = 0.7188, printed 0.71: table cut",
    "LF-iec-100-5s": "230/580 = 0.3966, printed 0.39: table cut",
    "LF-iec-100-0.4s": "230/1020 = 0.2255, printed 0.22: table cut",
    "FF-2018-B50-50": "0.8 x 0.874 = 0.699, printed 0.69: cut",
    "WE-13:fault_current_a": "230/0.12 = 1916.67, printed 1916: cut",
    "WE-13:least_area_mm2": "5.2686, printed 5.26: cut",
    "WE-14:least_area_mm2": "0.6875, printed 0.68: cut",
    "WE-20:earth_fault_loop_impedance_ohm": "0.5276, printed 0.52: cut",
    "WE-29:fault_current_a": "5.2273, printed 5.22: cut",
    "WE-49a:limit_ohm": "0.6992, printed 0.69: cut",
    "WE-49b:limit_ohm": "0.6992, printed 0.69: cut",
    "WE-54:greatest_impedance_ohm": "0.92857, printed 0.928: cut",
    "WE-37:limit_30_ma_ohm": "1666.67, printed 1666.6: cut",
    "WE-41:fault_current_a": "12.105, printed 12.1 with a step of 0.01: cut",
}

# By row and part: the service knowingly departs from the printed figure.
CONTRADICTED = {
    "OC-mult-D:bs-7671:2018,5s": "the 2018 set prints type D at 5 s for 10 In; the curves of the appendix say 20 In",
}

# By file and beginning of the row's name: oracles with nothing in the service to hold against them.
UNUSED: dict[str, dict[str, str]] = {
    "conductors": {
        "CR-co-5-": "flexible conductors are not held",
        "CW-": "armour is not held",
        "CK-": "only cores in cables are held, and of them those by the insulations of a request",
    },
    "conformance": {"CF-61557-": "operating uncertainties of IEC 61557 are an option that is not offered yet"},
    "constants": {
        "CO-cmax-6": "every shipped set takes the tolerance of 10 %",
        "CO-cmin-lv": "the IEC set takes 1 by 411.4.4, the British one its own 0.95",
        "CO-three-": "no policy of three quarters or three halves",
        "CO-ze-tn": "a declared external loop is the request's to state",
        "CO-ul-dc": "direct current is not judged yet",
        "CO-ul-low": "no shipped set has a reduced limit",
        "CO-insulation-": "insulation resistance is not judged yet",
    },
    "disconnection_times": {
        "DT-TN-dc-0": "no time is set: tested by itself",
        "DT-TT-dc-0": "no time is set: tested by itself",
        "DT-rule-0024": "a permission without a figure",
        "DT-rule-0026": "no Dutch set is shipped",
        "DT-old41": "superseded in 2005, and IT is not judged yet",
    },
    "longest_lengths": {"LL-": "the conventional method without a loop is not offered"},
    "residual_limits": {"RL-25-": "no shipped set has a reduced limit", "RL-24-": "no shipped set has a reduced limit"},
    "residual_times": {
        "RT-BS4293-": "delays by a superseded standard are not held",
        "RT-UK-0016": "of a superseded standard (BS 4293); 0.2 s there, 0.3 s in the one held",
        "RT-UK-0017": "of a superseded standard (BS 4293)",
        "RT-A-": "pulsating direct current is not judged yet",
    },
    "separation": {
        "SS-413-": "separated circuits are not judged yet",
        "SS-IT-": "IT is not judged yet",
        "SS-TR-": "isolating transformers are not judged yet",
        "SS-TC-": "touch current is not judged yet",
        "SS-BI-": "body current of separated circuits is not judged yet",
        "SS-SE-": "stored energy is not judged yet",
        "SS-WE-": "no check of separated circuits compares its figures yet",
    },
    "worked_examples": {
        "WE-05": "a rule of thumb of three quarters",
        "WE-07": "a longest length, rounded up by its source",
        "WE-17": "reactance is not held apart",
        "WE-18": "reactance is not held apart",
        "WE-19": "reactance is not held apart",
        "WE-23": "the official answer is neither figure",
        "WE-25": "a ring by its end-to-end resistances is not a reading",
        "WE-26": "a ring by its end-to-end resistances is not a reading",
        "WE-30": "a product of two given numbers",
        "WE-33": "a product of two given numbers",
        "WE-47": "a margin of 30 % on the current is no policy",
    },
}

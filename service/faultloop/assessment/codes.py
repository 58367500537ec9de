"""Small whole numbers that stand for words: readings, numbers and choices of a point, and what each may be."""

from collections.abc import Iterable

import numpy as np

from faultloop.electrical.measurement import Mask


class Codes:
    """Small whole numbers by name: plain ints, because numpy takes an enum's members many times slower."""

    @classmethod
    def codes(cls) -> dict[str, int]:
        """Every code by its word."""
        return {name.lower().replace("_", "-"): code for name, code in vars(cls).items() if name.isupper()}

    @classmethod
    def word(cls, code: int) -> str:
        """The word of a code."""
        return next(word for word, known in cls.codes().items() if known == code)


class Reading(Codes):
    """Rows of the table of readings."""

    LOOP = 0
    EXTERNAL = 1
    LINE_NEUTRAL = 2
    LINE_PLUS_PROTECTIVE = 3
    PROTECTIVE = 4
    ELECTRODE = 5
    TIME_1 = 6
    TIME_2 = 7
    TIME_5 = 8
    ORIGIN_LINE_NEUTRAL = 9
    TIME_HALF = 10
    INSULATION = 11
    BOARD_LOOP = 12
    BOARD_CURRENT = 13
    VOLTAGE = 14
    NEUTRAL_EARTH_VOLTAGE = 15
    OPERATING_CURRENT = 16
    L1_EARTH_VOLTAGE = 17
    L2_EARTH_VOLTAGE = 18
    L1_CONTACT = 19
    L2_CONTACT = 20
    WINDING_INSULATION = 21
    BONDING = 22
    LINE_LINE = 23
    FIRST_FAULT = 24
    MONITORED = 25


class Bound(Codes):
    """How a reading's value is meant."""

    MISSING = 0
    EXACT = 1
    ABOVE = 2
    BELOW = 3


class Method(Codes):
    """How a reading was taken."""

    UNSTATED = 0
    NO_TRIP = 1
    HIGH_CURRENT = 2
    DEAD = 3
    CALCULATED = 4
    DECLARED = 5


class Number(Codes):
    """Rows of the table of numbers; nan where unknown."""

    VOLTAGE = 0
    RATED_CURRENT = 1
    DEVICE_RATED_CURRENT = 2
    RESIDUAL_MA = 3
    RESIDUAL_GREATEST_MA = 4
    RESIDUAL_LEAST_MA = 5
    LINE_MM2 = 6
    NEUTRAL_MM2 = 7
    PROTECTIVE_MM2 = 8
    LINE_OHM_PER_KM = 9
    PROTECTIVE_OHM_PER_KM = 10
    LENGTH_M = 11
    SERVICE_C = 12
    TEST_C = 13
    ADIABATIC_K = 14
    BREAKING_CAPACITY_KA = 15
    BETWEEN_LINES_V = 16
    CARRYING_CAPACITY_A = 17
    COVERAGE_SCALE = 18
    RESIDUAL_QUICK_MA = 19
    DECLARED_CURRENT_KA = 20
    ASSEMBLY_RATING_KA = 21
    PROTECTIVE_K = 22
    PROTECTIVE_TABLE_MM2 = 23
    LET_THROUGH_A2S = 24
    CLASS_ENERGY_3_KA = 25
    CLASS_ENERGY_6_KA = 26
    CLASS_ENERGY_10_KA = 27
    COMBINATION_TO_KA = 28
    ZERO_EXCESS = 29
    OVERLOAD_CURRENT_A = 30
    FREQUENCY_HZ = 31
    TRANSFORMER_VA = 32
    SHORT_CIRCUIT_PERCENT = 33
    SHORT_CIRCUIT_TOLERANCE = 34
    PRIMARY_V = 35
    DIELECTRIC_V = 36
    INTERWINDING_NF = 37
    OUTLETS = 38
    ITEMS = 39
    CLASS_I_ITEMS = 40
    WIRING_M = 41
    FILTERS_NF = 42
    LEADS_OHM = 43
    STORED_UF = 44
    STORED_V = 45
    DISCHARGE_OHM = 46
    CONTACT_LEAST_MA = 47
    CONTACT_MA = 48
    CONTACT_GREATEST_MA = 49
    LINE_EARTH_NF = 50
    SET_POINT_KOHM = 51
    SECONDARY_V = 52
    LOAD_LOSS_W = 53
    DIELECTRIC_ASKED_V = 54
    LEADS_LEAST_OHM = 55
    FILTERS_LEAST_NF = 56
    LINK_LEAST_MA = 57
    LINK_MA = 58
    LINK_GREATEST_MA = 59


class Choice(Codes):
    """Rows of the table of choices: small whole numbers that pick a row or a case."""

    DEVICE = 0
    RESIDUAL = 1
    RULES = 2
    TEMPERATURE_POLICY = 3
    DECISION = 4
    EARTHING = 5
    CURRENT = 6
    ROLE = 7
    FEEDS = 8
    USERS = 9
    DESIGNATED = 10
    RING = 11
    INFERABLE = 12
    POLARITY = 13
    MEANS_OF_EARTHING = 14
    LOADS_CONNECTED = 15
    MULTIPOLE = 16
    LET_THROUGH = 17
    CALIBRATION_LAPSED = 18
    PHASES = 19
    EARTH_CONTACTS = 20
    REFERENCE = 21
    WINDINGS = 22
    MONITOR = 23
    NEUTRAL_DISTRIBUTED = 24
    EXPOSED_PARTS = 25
    LOOP_LINKED = 26
    PLANNED_LINK = 27


class Earthing(Codes):
    """Earthing of the supply."""

    UNKNOWN = 0
    TN_S = 1
    TN_C_S = 2
    TN_C = 3
    TT = 4
    IT = 5
    SEPARATED = 6


class Role(Codes):
    """Role of the circuit."""

    UNKNOWN = 0
    FINAL = 1
    DISTRIBUTION = 2


class Feeds(Codes):
    """What the circuit feeds."""

    UNKNOWN = 0
    SOCKET_OUTLETS = 1
    FIXED_EQUIPMENT = 2
    MOBILE_OUTDOORS = 3


class Users(Codes):
    """Who uses the outlet."""

    ORDINARY = 0
    INSTRUCTED = 1
    SKILLED = 2


class TemperaturePolicy(Codes):
    """How a cold reading is set against a hot limit."""

    SPLIT = 0
    TWO_THIRDS = 1
    FOUR_FIFTHS = 2
    NONE = 3


class Decision(Codes):
    """Whether the endangering end or the nominal value decides."""

    GUARDED = 0
    SIMPLE = 1


class LetThrough(Codes):
    """What the let-through energy of the overcurrent device rests on."""

    UNKNOWN = 0
    MAKER = 1
    CLASS_MARKED = 2
    CLASS_USUAL = 3
    FUSE = 4


class Polarity(Codes):
    """Polarity as tested."""

    UNKNOWN = 0
    CORRECT = 1
    REVERSED = 2


class MeansOfEarthing(Codes):
    """What is known of the means of earthing at the origin."""

    UNKNOWN = 0
    PROVEN = 1
    DOUBTFUL = 2
    LOST = 3


class EarthContacts(Codes):
    """What the earth contacts of a separated supply's outlets are joined to."""

    UNKNOWN = 0
    UNCONNECTED = 1
    BONDED = 2
    EARTHED = 3


class Reference(Codes):
    """Whether a live part of a separated supply is known to be joined to earth."""

    UNKNOWN = 0
    FLOATING = 1
    EARTHED = 2
    # Nothing is earthed, but a part of an instrument that anybody may touch stands at a pole, or may stand there.
    PART_AT_POLE = 3
    PART_PERHAPS = 4


class Windings(Codes):
    """Insulation between the windings of a separating transformer."""

    UNKNOWN = 0
    BASIC = 1
    REINFORCED = 2


class Monitor(Codes):
    """What is known of an IT supply's insulation monitor."""

    UNKNOWN = 0
    ABSENT = 1
    UNTESTED = 2
    TESTED = 3


class Distributed(Codes):
    """Whether an IT supply's neutral goes along to the outlets."""

    UNKNOWN = 0
    YES = 1
    NO = 2


class ExposedParts(Codes):
    """How the exposed parts of an IT supply are earthed."""

    UNKNOWN = 0
    TOGETHER = 1
    SEPARATELY = 2


class PlannedLink(Codes):
    """What a link that is about to be made does to a bench, by how it stands with it and stood before."""

    NONE = 0
    KEEPS = 1
    TIES = 2
    TIED_BEFORE = 3
    MAY_TIE = 4
    SHORTS = 5


class Current(Codes):
    """Kind of current."""

    AC = 0
    DC = 1


# Supplies by how a fault to earth behaves: on the first an earth fault current flows and is cleared.
EARTHED = frozenset((Earthing.UNKNOWN, Earthing.TN_S, Earthing.TN_C_S, Earthing.TN_C, Earthing.TT))
INSULATED = frozenset((Earthing.IT,))
SEPARATED = frozenset((Earthing.SEPARATED,))


def among(codes: Iterable[int], of: type[Codes] = Earthing) -> Mask:
    """Table of whether a code is among some, to be indexed by codes: many times quicker than a search."""
    table = np.zeros(len(of.codes()), np.bool_)
    table[list(codes)] = True
    return table

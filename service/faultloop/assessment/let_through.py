"""The greatest earth fault current at the board, and the energy that the device lets through at it."""

from dataclasses import dataclass

import numpy as np

from faultloop.assessment.codes import Number, Reading
from faultloop.assessment.given import Given
from faultloop.electrical.fault_current import prospective_current
from faultloop.electrical.measurement import Array, Interval

# Columns of the table of energy-limiting classes [kA], and the rows of numbers that hold them.
COLUMNS = ((3.0, Number.CLASS_ENERGY_3_KA), (6.0, Number.CLASS_ENERGY_6_KA), (10.0, Number.CLASS_ENERGY_10_KA))


@dataclass(frozen=True, slots=True)
class LetThroughEnergy:
    """Greatest current at the board [A], inf where nothing bounds it; energy at once [A²s], nan where unknown."""

    board_a: Array
    energy_a2s: Array


def let_through(g: Given, current: Interval) -> LetThroughEnergy:
    """Energy of an interruption at once: as stated, else by the column of the class for the greatest current."""
    number = g.points.number
    if np.isnan(number(Number.PROTECTIVE_MM2)).all():
        # Nobody asks for it where no protective conductor is stated.
        unknown = np.full(g.points.count, np.nan)
        return LetThroughEnergy(unknown, unknown)
    board, capacity = _greatest_at_board(g, current), number(Number.BREAKING_CAPACITY_KA)
    # Where nothing bounds the current the breaking capacity does: beyond it another check fails.
    bound = np.where(np.isinf(board) & ~np.isnan(capacity), capacity, board / 1000.0)
    columns = [np.where(bound <= to_ka, number(which), np.inf) for to_ka, which in COLUMNS]
    by_class = np.fmin.reduce(columns, axis=0)
    stated = number(Number.LET_THROUGH_A2S)
    return LetThroughEnergy(board, np.where(np.isnan(stated), np.where(np.isinf(by_class), np.nan, by_class), stated))


def _greatest_at_board(g: Given, current: Interval) -> Array:
    """By the loop at the board, else at the origin, which is lower still, or a stated current; else as declared."""
    number, board, external = g.points.number, g.reading(Reading.BOARD_LOOP), g.reading(Reading.EXTERNAL)
    read = np.where(np.isnan(board.least), external.least, board.least)
    by_reading = prospective_current(g.rule["c_max"], number(Number.VOLTAGE), read)
    by_reading = np.fmax(by_reading, 1000.0 * g.reading(Reading.BOARD_CURRENT).greatest)
    known = np.where(np.isnan(by_reading), 1000.0 * number(Number.DECLARED_CURRENT_KA), by_reading)
    return np.where(np.isnan(known), np.inf, np.fmax(known, current.greatest))

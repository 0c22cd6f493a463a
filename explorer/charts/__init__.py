"""Charts as pure functions of tables; each has a twin that says in words what it shows."""

from explorer.charts.binning import MANY, cells, response_table
from explorer.charts.drivers import (
    convergence_chart,
    convergence_in_words,
    drivers_chart,
    drivers_in_words,
    input_clicked,
    response_chart,
    response_in_words,
)
from explorer.charts.frame import energy_bars, energy_in_words, profile_chart, profile_in_words
from explorer.charts.front import MODES, frames_clicked, front_chart, front_in_words

__all__ = [
    "MANY",
    "MODES",
    "cells",
    "convergence_chart",
    "convergence_in_words",
    "drivers_chart",
    "drivers_in_words",
    "energy_bars",
    "energy_in_words",
    "frames_clicked",
    "front_chart",
    "front_in_words",
    "input_clicked",
    "profile_chart",
    "profile_in_words",
    "response_chart",
    "response_in_words",
    "response_table",
]

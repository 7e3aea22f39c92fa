"""The windows of the default survey, complete on two routes that share neither ray, meeting point nor steps."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from knell.methods.match.geometry import MAIN_ROUTE, OTHER_ROUTE
from knell.methods.match.search import search
from knell.physics.equation import equation_floats
from knell.physics.landmarks import window
from knell.survey.config import load_config
from knell.survey.points import Point

CONFIG = Path(__file__).parents[2] / "config/config.yaml"
POINTS = load_config(str(CONFIG), {}).points


@pytest.mark.slow
@pytest.mark.parametrize("point", POINTS, ids=lambda point: point.slug)
def test_two_routes_find_the_same_complete_window(point: Point) -> None:
    background = point.background()
    equation = equation_floats(background, point.field, point.ell)
    region = window(background, point.ell)
    first, second = (search(equation, region, route) for route in (MAIN_ROUTE, OTHER_ROUTE))
    assert first.complete and second.complete
    # The design asks for eight digits; doubles are good to 1e-11 on each route at these couplings.
    assert np.all(np.abs(first.zeros - second.zeros) <= 1e-8 * np.abs(first.zeros))

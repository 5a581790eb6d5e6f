from __future__ import annotations

import math

import numpy as np
import pytest

from springpoise.errors import InputError, InputTypeError
from springpoise.springs.wire.fatigue import (
    CRITERIA,
    ZIMMERLI_PEENED,
    ZIMMERLI_UNPEENED,
    EndurancePoint,
    Fatigue,
    as_fatigue,
    endurance,
    fatigue_factor,
    reversed_limit,
)

OWN = EndurancePoint("200 MPa", "300 MPa", largest_wire="5 mm", name="own")


class TestJudgement:
    def test_names(self) -> None:
        assert as_fatigue("gerber") == Fatigue("gerber", ZIMMERLI_UNPEENED)
        with pytest.raises(InputError, match="one of 'sines', 'gerber', 'goodman', got 'soderberg'"):
            Fatigue("soderberg")
        with pytest.raises(InputTypeError, match="fatigue must be a Fatigue or one of"):
            as_fatigue(1.5)

    def test_hooks_are_not_peened(self) -> None:
        assert Fatigue("goodman", ZIMMERLI_PEENED).at_hooks.point == ZIMMERLI_UNPEENED
        assert Fatigue("goodman", ZIMMERLI_PEENED, OWN).at_hooks.point == OWN
        assert Fatigue("goodman", OWN).at_hooks.point == OWN

    def test_sines_is_for_torsion_only(self) -> None:
        assert Fatigue("sines").in_bending.criterion == "gerber"
        assert Fatigue("goodman").in_bending.criterion == "goodman"


class TestFactor:
    def test_without_mean(self) -> None:
        for criterion in CRITERIA:
            assert fatigue_factor(criterion, 2.0, 0.0, 5.0, 10.0) == pytest.approx(2.5)

    def test_without_amplitude(self) -> None:
        assert fatigue_factor("gerber", 0.0, 4.0, 5.0, 10.0) == pytest.approx(2.5)
        assert fatigue_factor("goodman", 0.0, 4.0, 5.0, 10.0) == pytest.approx(2.5)
        assert fatigue_factor("sines", 0.0, 4.0, 5.0, 10.0) == math.inf

    def test_without_stress(self) -> None:
        for criterion in CRITERIA:
            assert fatigue_factor(criterion, 0.0, 0.0, 5.0, 10.0) == math.inf
            assert np.array_equal(fatigue_factor(criterion, np.zeros(2), 0.0, 5.0, 10.0), [math.inf, math.inf])

    def test_nan(self) -> None:
        for criterion in CRITERIA:
            assert math.isnan(fatigue_factor(criterion, math.nan, 1.0, 5.0, 10.0))

    def test_the_endurance_point_lies_on_its_own_line(self) -> None:
        for criterion in CRITERIA:
            limit = reversed_limit(criterion, 200.0, 300.0, 1200.0)
            assert fatigue_factor(criterion, 200.0, 300.0, limit, 1200.0) == pytest.approx(1.0, rel=1e-12)


class TestEndurance:
    def test_refusals(self) -> None:
        with pytest.raises(InputError, match="<= 5 mm for the endurance point 'own'"):
            endurance(Fatigue("gerber", OWN), 0.006, 1e9, spring_steel=True)
        with pytest.raises(InputError, match="no spring steel"):
            endurance(Fatigue("gerber", OWN), 0.004, 1e9, spring_steel=False)
        with pytest.raises(InputError, match="mean below the torsional strength"):
            endurance(Fatigue("gerber", OWN), 0.004, 300e6, spring_steel=True)

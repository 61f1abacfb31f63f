import numpy as np
import pandas as pd
import pytest

from effluent.calc.plausible import (
    far_above_history,
    history_question,
    medians,
    reporting_above_limit,
    reporting_question,
)


def readings(*rows):
    return pd.DataFrame(rows, columns=["point", "analyte", "canonical_unit", "value"])


HISTORY = readings(
    ("P1", "cadmium", "mg/L", 0.01),
    ("P1", "cadmium", "mg/L", 0.02),
    ("P1", "cadmium", "mg/L", 20.0),
    ("P1", "zinc", "mg/L", 0.0),
)


@pytest.mark.parametrize(
    ("row", "far"),
    [
        (("P1", "cadmium", "mg/L", 20.0), True),
        (("P1", "cadmium", "mg/L", 19.9), False),
        (("P2", "cadmium", "mg/L", 20.0), False),
        (("P1", "cadmium", "mg/kg", 20.0), False),
        (("P1", "lead", "mg/L", 20.0), False),
        (("P1", "zinc", "mg/L", 20.0), False),
    ],
)
def test_value_a_thousand_times_its_history_is_found(row, far):
    assert far_above_history(readings(row), medians(HISTORY)).tolist() == [far]


def test_without_history_nothing_is_far():
    assert far_above_history(HISTORY, medians(HISTORY[:0])).tolist() == [False] * 4


def test_history_question_names_reading_and_median():
    assert history_question("20 mg/L", 0.02, unit="mg/L") == (
        "20 mg/L is a thousand times the median of this point, 0.02 mg/L, or more: is the unit right?"
    )


def test_reporting_limit_above_the_limit_is_found():
    found = reporting_above_limit([0.5, 0.11, 0.1, np.nan, 0.5], [0.11, 0.11, 0.11, 0.11, np.nan])
    assert found.tolist() == [True, False, False, False, False]


def test_reporting_question_names_both():
    assert reporting_question("0.5 mg/L", "0.11 mg/L") == (
        "the reporting limit 0.5 mg/L lies above the limit 0.11 mg/L in force: a non-detect would prove "
        "nothing; can the laboratory reach lower?"
    )

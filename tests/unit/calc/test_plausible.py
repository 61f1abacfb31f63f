import pytest

from effluent.calc.plausible import history_question, is_far, medians, reporting_question

CADMIUM, ZINC = ("cadmium", "mg/L"), ("zinc", "mg/L")


def test_medians_are_those_of_each_key():
    history = [(CADMIUM, 0.01), (ZINC, 1.0), (CADMIUM, 20.0), (CADMIUM, 0.02), (ZINC, 2.0)]
    assert medians(history) == {CADMIUM: 0.02, ZINC: 1.5}


def test_without_history_there_are_no_medians():
    assert medians([]) == {}


@pytest.mark.parametrize(
    ("value", "usual", "far"),
    [(20.0, 0.02, True), (19.9, 0.02, False), (20.0, None, False), (20.0, 0.0, False)],
)
def test_value_a_thousand_times_its_history_is_far(value, usual, far):
    assert is_far(value, usual) is far


def test_history_question_names_reading_and_median():
    assert history_question("20 mg/L", 0.02, unit="mg/L") == (
        "20 mg/L is a thousand times the median of this point, 0.02 mg/L, or more: is the unit right?"
    )


def test_reporting_question_names_both():
    assert reporting_question("0.5 mg/L", "0.11 mg/L") == (
        "the reporting limit 0.5 mg/L lies above the limit 0.11 mg/L in force: a non-detect would prove "
        "nothing; can the laboratory reach lower?"
    )

"""Value cells as laboratories write them (common practice, no source), and the refusals with their remedy."""

import pytest

from effluent.calc.cell import Cell, read_cell
from effluent.domain import Qualifier
from effluent.errors import ValueRefused

POINT = [
    ("0.11", "=", "0.11", ""),
    (" 0.110 ", "=", "0.110", ""),
    ("12", "=", "12", ""),
    (".5", "=", "0.5", ""),
    ("5.", "=", "5", ""),
    ("+5", "=", "5", ""),
    ("0", "=", "0", ""),
    ("0.000", "=", "0.000", ""),
    ("<0.005", "<", "0.005", ""),
    ("< 0.005", "<", "0.005", ""),
    ("\uff1c0.005", "<", "0.005", ""),
    (">200", ">", "200", ""),
    ("\ufe65 200", ">", "200", ""),
    ("0.005 U", "<", "0.005", "U"),
    ("0.005U", "<", "0.005", "U"),
    ("0.005 u", "<", "0.005", "u"),
    ("0.005 UJ", "<", "0.005", "UJ"),
    ("<0.005 U", "<", "0.005", "U"),
    ("<0.005 U,H", "<", "0.005", "U,H"),
    ("0.005 ND", "<", "0.005", "ND"),
    ("ND (0.005)", "<", "0.005", "ND"),
    ("ND<0.005", "<", "0.005", "ND"),
    ("0.0123 J", "=", "0.0123", "J"),
    ("0.0123J+", "=", "0.0123", "J+"),
    ("0.5 (J)", "=", "0.5", "J"),
    ("3.2 J, B *", "=", "3.2", "J, B *"),
    ("3.2 B", "=", "3.2", "B"),
    ("3.2 H", "=", "3.2", "H"),
    ("3.2*", "=", "3.2", "*"),
    ("1.2 E", "=", "1.2", "E"),
    ("1,234.5", "=", "1234.5", ""),
    ("1,234,567", "=", "1234567", ""),
    ("1.2E-3", "=", "0.0012", ""),
    ("<1.0E-03", "<", "0.0010", ""),
    ("1.5e+2", "=", "150", ""),
    ("1\u202f234.5", "=", "1234.5", ""),
    ("1\u00a0234", "=", "1234", ""),
    ("0.11\u00a0J", "=", "0.11", "J"),
]
COMMA = [
    ("0,11", "=", "0.11", ""),
    ("< 0,005", "<", "0.005", ""),
    ("0,005 U", "<", "0.005", "U"),
    ("1.234,5", "=", "1234.5", ""),
    ("1.234.567", "=", "1234567", ""),
    ("1,234", "=", "1.234", ""),
    ("1,2E-3", "=", "0.0012", ""),
    (",5", "=", "0.5", ""),
    ("12", "=", "12", ""),
]
READ = [(*row, False) for row in POINT] + [(*row, True) for row in COMMA]


@pytest.mark.parametrize(("text", "qualifier", "number", "flag", "comma"), READ)
def test_cell_is_read(text, qualifier, number, flag, comma):
    assert read_cell(text, decimal_comma=comma) == Cell(Qualifier(qualifier), number, flag)


NO_NUMBER = ["ND", "nd", "n.d.", "N.D", "not detected", "Not Detected", "BDL", "non-detect", "U", "UJ"]


@pytest.mark.parametrize("text", NO_NUMBER)
def test_not_detected_takes_the_reporting_limit(text):
    cell = read_cell(text, decimal_comma=False, reporting_limit="0.005")
    assert cell == Cell(Qualifier.BELOW, "0.005", text)


def test_below_the_reporting_limit_needs_no_flag():
    assert read_cell("< RL", decimal_comma=False, reporting_limit="5") == Cell(Qualifier.BELOW, "5", "")


@pytest.mark.parametrize(("limit", "comma"), [("0,005", True), ("<0.005", False), (" 5E-3 ", False)])
def test_the_reporting_limit_is_read_like_a_value(limit, comma):
    assert read_cell("ND", decimal_comma=comma, reporting_limit=limit).number == "0.005"


@pytest.mark.parametrize("text", NO_NUMBER)
def test_not_detected_without_a_limit_is_refused(text):
    with pytest.raises(ValueRefused, match="give the reporting limit"):
        read_cell(text, decimal_comma=False)


@pytest.mark.parametrize("limit", ["0", "-1", "0,005", "x", "1,234"])
def test_a_reporting_limit_that_is_none_is_refused(limit):
    with pytest.raises(ValueRefused):
        read_cell("ND", decimal_comma=False, reporting_limit=limit)


REFUSED = [
    ("", "the cell is empty"),
    ("   ", "the cell is empty"),
    ("trace", "a trace is no number"),
    ("Traces", "a trace is no number"),
    ("pending", "there is no result yet"),
    ("see note", "there is no result yet"),
    ("N/A", "there is no result yet"),
    ("≤5", "'or equal' can turn a verdict"),
    (">=5", "'or equal' can turn a verdict"),
    ("1.0 ± 0.1", "the uncertainty belongs in its own column"),
    ("1.0 +/- 0.1", "the uncertainty belongs in its own column"),
    ("1.2E", "complete the power of ten"),
    ("1.2D", "complete the power of ten"),
    ("0.5 R", "the result was rejected"),
    ("0.5 K", "this flag has opposite meanings"),
    ("0.5 L", "this flag has opposite meanings"),
    ("5 mg/L", "the unit belongs in the unit column"),
    ("5 NTU", "the unit belongs in the unit column"),
    ("7 SU", "the unit belongs in the unit column"),
    ("0.5 UG", "the unit belongs in the unit column"),
    ("25 C", "the unit belongs in the unit column"),
    ("25°", "the unit belongs in the unit column"),
    ("5 %", "the unit belongs in the unit column"),
    ("6.5-7.2", "a range is no reading"),
    ("1,23", "declare that the file uses a decimal comma"),
    ("0,005", "declare that the file uses a decimal comma"),
    ("1,234", "it can mean 1234 or 1.234"),
    ("<1,234", "it can mean 1234 or 1.234"),
    ("0.1.2", "write a number as in 0.11"),
    ("1 234", "write a number as in 0.11"),
    ("0.5¹", "write a number as in 0.11"),
    ("1_000", "write a number as in 0.11"),
    ("nan", "write a number as in 0.11"),
    ("inf", "write a number as in 0.11"),
    ("٣", "write a number as in 0.11"),
    ("~5", "write a number as in 0.11"),
    ("<", "write a number as in 0.11"),
    ("<ND", "write a number as in 0.11"),
    (".", "write a number as in 0.11"),
    ("1e100", "write a number as in 0.11"),
    ("1e31", "beyond any measured value"),
    ("1e-31", "beyond any measured value"),
    (">5 U", "above and not detected at once"),
    (">5 ND", "above and not detected at once"),
    ("<0", "a bound of zero says nothing"),
    ("0.00 U", "a bound of zero says nothing"),
    (">0", "a bound of zero says nothing"),
    ("-3", "an amount is never below zero"),
    ("\u22123", "an amount is never below zero"),
    ("1" * 61, "it is too long"),
]


@pytest.mark.parametrize(("text", "remedy"), REFUSED)
def test_cell_that_says_nothing_sure_is_refused_with_a_remedy(text, remedy):
    with pytest.raises(ValueRefused) as refused:
        read_cell(text, decimal_comma=False)
    assert remedy in str(refused.value)


@pytest.mark.parametrize(
    ("text", "remedy"),
    [
        ("1.234", "write 1234 without grouping, or 1,234 with the decimal mark that was declared"),
        ("0.005", "a decimal comma was declared"),
        ("1.2E-3", "a decimal comma was declared"),
        ("1,2,3", "a decimal comma was declared"),
    ],
)
def test_a_point_where_a_comma_was_declared_is_refused(text, remedy):
    with pytest.raises(ValueRefused) as refused:
        read_cell(text, decimal_comma=True)
    assert remedy in str(refused.value)


def test_a_temperature_may_be_below_zero():
    assert read_cell("\u22123.5", decimal_comma=False, negative=True).number == "-3.5"
    assert read_cell("<0", decimal_comma=False, negative=True) == Cell(Qualifier.BELOW, "0", "")


def test_the_refusal_is_one_sentence_with_the_cell():
    with pytest.raises(ValueRefused) as refused:
        read_cell("1,234", decimal_comma=False)
    assert str(refused.value) == (
        "value '1,234' is not accepted: it can mean 1234 or 1.234; write 1234 without grouping, "
        "or 1.234 with the decimal mark that was declared"
    )

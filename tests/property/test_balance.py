from fractions import Fraction

from hypothesis import assume, given
from hypothesis import strategies as st

from effluent.calc.balance import Answer, balance, summary
from effluent.domain import Quantity

VOLUME = st.builds(
    lambda tenths, spread: Quantity(f"{tenths / 10}", "L", f"{spread / 10}"),
    st.integers(0, 9999),
    st.integers(0, 99),
)
BALANCE = st.builds(balance, st.lists(VOLUME, max_size=3), st.none() | VOLUME, st.none() | VOLUME)
SHARE = st.fractions(0, 1)


@given(BALANCE)
def test_parts_add_up_exactly(found):
    assert found.caught + found.retained + found.unaccounted == found.put_in


@given(st.lists(st.tuples(st.sampled_from("AB"), BALANCE), max_size=6), st.randoms())
def test_summary_does_not_depend_on_the_order(balances, random):
    assert summary(random.sample(balances, len(balances))) == summary(balances)


@given(BALANCE, SHARE, SHARE)
def test_higher_threshold_never_turns_within_into_above(found, low, high):
    assume(low <= high)
    if found.flagged(low) == Answer.WITHIN:
        assert found.flagged(high) != Answer.ABOVE


@given(BALANCE)
def test_share_lies_on_the_side_that_the_answer_names(found):
    answer = found.flagged(Fraction(1, 10))
    if answer != Answer.OPEN and found.share is not None:
        assert (found.share > Fraction(1, 10)) == (answer == Answer.ABOVE)

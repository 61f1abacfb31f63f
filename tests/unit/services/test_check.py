from __future__ import annotations

from datetime import UTC, date, datetime

import pytest

from effluent.domain import Bound, Outcome, Statistic
from effluent.errors import RecordMissing
from effluent.services.check import Wanted, check, container_verdicts, verdicts_for
from tests.shipping import fill
from tests.world import NOON, add_limit, add_result, add_sample, add_wash, world


def test_a_container_is_held_against_the_limits_of_its_site(ledger_place: str) -> None:
    with world(ledger_place) as book:
        sample = add_sample(book)
        number = add_result(book, sample, "cadmium", "120", "ug/L")
        limits = [add_limit(book, point, "cadmium", "0.11 mg/L") for point in ("SEW", "HAUL")]
        found = check(book, Wanted(container="T-1"))
    assert [(v.limit.code, v.outcome, v.results) for v in found.verdicts] == [
        (limit, Outcome.OVER, (number,)) for limit in limits
    ]
    assert found.strictest[sample].outcome == Outcome.OVER
    assert found.without_verdict == ()


def test_against_names_the_only_point_that_counts(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_result(book, add_sample(book), "cadmium", "0.1", "mg/L")
        add_limit(book, "SEW", "cadmium", "0.05 mg/L")
        kept = add_limit(book, "HAUL", "cadmium", "1 mg/L")
        found = check(book, against="HAUL")
    assert [(v.limit.code, v.outcome) for v in found.verdicts] == [(kept, Outcome.WITHIN)]


def test_a_sample_at_a_point_answers_for_that_point_alone(ledger_place: str) -> None:
    with world(ledger_place) as book:
        sample = add_sample(book, point="SEW")
        add_result(book, sample, "ph", "5.0", "")
        kept = add_limit(book, "SEW", "ph", "5.0", bound=Bound.MINIMUM)
        add_limit(book, "HAUL", "ph", "6.0", bound=Bound.MINIMUM)
        found = check(book, Wanted(point="SEW"))
    assert [(v.limit.code, v.outcome) for v in found.verdicts] == [(kept, Outcome.WITHIN)]


def test_what_gives_no_verdict_is_named(ledger_place: str) -> None:
    with world(ledger_place) as book:
        sample = add_sample(book)
        unread = add_limit(book, "SEW", "lead", "0.4 mg/L")
        mass = add_limit(book, "SEW", "cadmium", "0.1 kg/d", statistic=Statistic.MASS_DAY)
        add_limit(book, "SEW", "zinc", "2 mg/L", effective_to=date(2020, 12, 31))
        found = check(book)
    assert found.verdicts == ()
    assert [(each.water, each.limit.code) for each in found.without_reading] == [("container T-1", unread)]
    assert [limit.code for limit in found.not_computed] == [mass]
    assert found.without_verdict == (sample,)


def test_the_day_is_the_local_one(ledger_place: str) -> None:
    """23:30 UTC on 30 June is 1 July in Lisbon, an hour ahead in summer."""
    with world(ledger_place) as book:
        add_sample(book, started_at=datetime(2025, 6, 30, 23, 30, tzinfo=UTC))
        july = check(book, Wanted(since=date(2025, 7, 1), until=date(2025, 7, 1)))
        june = check(book, Wanted(until=date(2025, 6, 30)))
    assert (len(july.without_verdict), len(june.without_verdict)) == (1, 0)


def test_two_containers_never_share_a_daily_verdict(ledger_place: str) -> None:
    with world(ledger_place) as book:
        for sample in (add_sample(book), add_sample(book, wash=add_wash(book))):
            add_result(book, sample, "zinc", "1", "mg/L")
        add_limit(book, "SEW", "zinc", "2 mg/L", statistic=Statistic.DAILY)
        found = check(book, Wanted(site="LIS"))
    assert [v.samples for v in found.verdicts] == [("S-0001",), ("S-0002",)]


def test_a_late_analysis_is_noted(ledger_place: str) -> None:
    """40 CFR 136.3 Table II: pH within 15 minutes of collection."""
    with world(ledger_place) as book:
        sample = add_sample(book)
        add_result(book, sample, "ph", "7", "s.u.", analysed_at=NOON.replace(minute=16))
        add_limit(book, "SEW", "ph", "9", bound=Bound.MAXIMUM)
        found = check(book)
    assert "analysed outside its holding time" in found.verdicts[0].notes


def test_as_of_an_earlier_entry_nothing_later_counts(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_result(book, add_sample(book), "zinc", "3", "mg/L")
        before = str(book.head().sequence)
        add_limit(book, "SEW", "zinc", "2 mg/L")
        assert check(book, as_of=before).verdicts == ()
        assert len(check(book).verdicts) == 1


def test_verdicts_inside_an_open_view(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_result(book, add_sample(book), "zinc", "3", "mg/L")
        add_limit(book, "SEW", "zinc", "2 mg/L")
        with book.reading() as view:
            samples = view.values("sample")
            assert verdicts_for(view, samples) == container_verdicts(view, "T-1")
            assert verdicts_for(view, samples, points=["HAUL"]) == ()


@pytest.mark.parametrize("wanted", [Wanted(sample="S-9"), Wanted(container="T-9"), Wanted(site="X")])
def test_an_unknown_name_is_refused(ledger_place: str, wanted: Wanted) -> None:
    with world(ledger_place) as book, pytest.raises(RecordMissing):
        check(book, wanted)


def test_a_sample_of_another_container_is_not_asked_for(ledger_place: str) -> None:
    with world(ledger_place) as book:
        sample = add_sample(book, point="SEW")
        found = check(book, Wanted(sample=sample, container="T-1"))
    assert found.without_verdict == ()


def test_later_water_of_the_container_asked_about_is_told(ledger_place: str) -> None:
    with world(ledger_place) as book:
        sample = add_sample(book)
        fill(book, "T-1", hours=1)
        assert check(book, Wanted(container="T-1")).unsampled.startswith("container T-1: water went in")
        assert check(book, Wanted(container="T-1", until=date(2026, 3, 2))).unsampled == ""
        assert check(book, Wanted(container="T-1", sample=sample)).unsampled == ""
        assert check(book).unsampled == ""

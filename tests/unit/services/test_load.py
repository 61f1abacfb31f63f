from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace

import pytest

from effluent.domain import Container, ContainerKind, Manifest, ManifestLine, Quantity
from effluent.errors import EffluentError, StateRefused, UnitUnknown
from effluent.services import manifest as manifests
from effluent.services.load import MOST_CODES, doubts, prepared, proposed
from effluent.store.ledger import Ledger
from tests.shipping import add_drums, add_parties, fill, line, manifest, ready
from tests.world import SITE, record, world


@pytest.fixture
def book(ledger_place: str) -> Iterator[Ledger]:
    with world(ledger_place) as book:
        add_parties(book)
        add_drums(book, "D-1")
        yield book


def prepare(book: Ledger, wanted: Manifest) -> Manifest:
    with book.reading() as reading:
        return prepared(reading, wanted)


def doubted(book: Ledger, quantity: str) -> list[str]:
    with book.reading() as reading:
        return list(doubts(reading, prepared(reading, manifest(line("D-1", quantity)))))


def refusal(book: Ledger, wanted: Manifest) -> str:
    """Return why a manifest is refused; nothing if it is not."""
    try:
        prepare(book, wanted)
    except EffluentError as error:
        return str(error)
    return ""


def test_quantity_left_out_is_the_content_in_whole_units(book: Ledger) -> None:
    add_drums(book, "D-2")
    fill(book, "D-1", "150.4")
    fill(book, "D-2", "150.5")
    asked = [("D-1", "L"), ("D-2", "L")]
    lines = [ManifestLine(container=c, description="x", quantity=proposed(unit)) for c, unit in asked]
    assert [str(each.quantity) for each in prepare(book, manifest(*lines)).lines] == ["150 L", "151 L"]
    in_gallons = manifest(replace(lines[0], quantity=proposed("gal")))
    # 150.4 L / 3.785411784 L = 39.73 (US gallon: NIST Handbook 44, appendix C).
    assert str(prepare(book, in_gallons).lines[0].quantity) == "40 gal"
    assert "weigh it" in refusal(book, manifest(replace(lines[0], quantity=proposed("kg"))))


def test_nothing_is_proposed_for_an_empty_container(book: Ledger) -> None:
    assert "it holds 0 L on record" in refusal(book, manifest(line("D-1")))


def test_quantity_is_whole_above_zero_and_in_a_unit_of_the_form(book: Ledger) -> None:
    # EPA form 8700-22, instructions for items 11 and 12: whole numbers, no decimals; the units of Table II.
    for quantity in ("150.5 L", "0 L", "-3 L", "150 ± 1 L", "1e99 L"):
        assert "the form takes whole units above zero" in refusal(book, manifest(line("D-1", quantity)))
    with pytest.raises(UnitUnknown, match="the manifest form takes"):
        prepare(book, manifest(line("D-1", "150000 mL")))
    assert prepare(book, manifest(line("D-1", "1.50e2 L"))).lines[0].quantity == Quantity("150", "L")


def test_quantity_more_than_a_tenth_off_the_content_is_questioned(book: Ledger) -> None:
    fill(book, "D-1", "150")
    for quantity in ("135 L", "165 L", "150 kg", "40 gal", "331 lb"):
        assert doubted(book, quantity) == []
    for quantity in ("134 L", "166 L", "1500 kg", "50 gal"):
        (doubt,) = doubted(book, quantity)
        assert doubt.startswith(f"container D-1: {quantity} is more than 10 % off the 150 L on record")


def test_nominal_capacity_is_no_estimate(book: Ledger) -> None:
    # EPA form 8700-22, instructions for item 11: container capacity is not acceptable as the estimate.
    fill(book, "D-1", "195")
    for quantity in ("208 L", "55 gal"):
        assert doubted(book, quantity) == [
            f"container D-1: {quantity} is its nominal capacity, which is no estimate of what it holds"
        ]


def test_container_on_another_draft_is_questioned(book: Ledger) -> None:
    fill(book, "D-1", "150")
    code = manifests.draft(book, manifest(line("D-1")), by="AM")
    assert doubted(book, "150 L") == [f"container D-1 also stands on draft {code}"]


def test_shipped_container_is_refused(book: Ledger) -> None:
    ready(book, "D-2")
    code = manifests.draft(book, manifest(line("D-2")), by="AM")
    manifests.issue(book, code, by="AM")
    with pytest.raises(StateRefused, match="container D-2 is shipped"):
        prepare(book, manifest(line("D-2")))


def amend_site(book: Ledger, **changes: str) -> None:
    there = replace(SITE, **changes)  # type: ignore[arg-type]
    book.write(lambda writing: writing.amend(there), by="AM", action="amend site")


def test_emergency_contact_is_the_sites_unless_named(book: Ledger) -> None:
    amend_site(book, emergency_contact="Desk", emergency_phone="+00 555 0199")
    blank = manifest(line("D-1", "150 L"), emergency_contact="", emergency_phone="+00 555 0100")
    complete = prepare(book, blank)
    assert (complete.emergency_contact, complete.emergency_phone) == ("Desk", "+00 555 0100")


def test_official_number_has_the_published_format_where_it_applies(book: Ledger) -> None:
    # 40 CFR 262.21(f)(2): nine digits, then three letters.
    wanted = {n: manifest(tracking_number=n) for n in ("", "012345678JJK", "12345678JJK", "012345678jjk")}
    assert [refusal(book, each) for each in wanted.values()] == [""] * 4
    amend_site(book, shipping_paper_country="US")
    refused = [number for number, each in wanted.items() if "official tracking number" in refusal(book, each)]
    assert refused == ["12345678JJK", "012345678jjk"]


def test_contradictions_are_refused(book: Ledger) -> None:
    record(book, replace(SITE, code="OPO"))
    record(book, Container(code="X", kind=ContainerKind.DRUM, site="LIS", capacity=Quantity("60", "L")))
    one = line("D-1", "1 L")
    expected = {
        "company WORKS is on record as a receiving facility": manifest(one, carriers=("WORKS",)),
        "company HAUL is on record as a carrier": manifest(one, facility="HAUL"),
        "carrier 'HAUL' is not accepted: name it once": manifest(one, carriers=("HAUL", "HAUL")),
        "container 'D-1' is not accepted: name it once": manifest(one, one),
        "describe the waste": manifest(replace(one, description=" ")),
        f"a line takes up to {MOST_CODES}": manifest(replace(one, waste_codes="A B C D E F G")),
        "no container 'D-9'": manifest(line("D-9", "1 L")),
        "no company 'NONE'": manifest(facility="NONE"),
        "it stands at LIS, the manifest is for OPO": manifest(one, site="OPO"),
        "effluent container amend X --material": manifest(line("X", "1 L")),
    }
    for text, wanted in expected.items():
        assert text in refusal(book, wanted)


def test_waste_codes_are_listed_once_in_order(book: Ledger) -> None:
    written = line("D-1", "1 L", waste_codes="D008, D006 D008")
    assert prepare(book, manifest(written)).lines[0].waste_codes == "D008 D006"

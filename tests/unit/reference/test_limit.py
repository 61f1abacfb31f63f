"""Published limits are found by key and by table."""

import pytest

from effluent.domain.quantity import exact
from effluent.errors import RecordMissing
from effluent.reference.limit import row, rows, tables


def test_rows_of_all_tables_are_all_rows():
    assert [limit for table in tables() for limit in rows(table)] == list(rows())


def test_key_begins_with_its_table_and_needs_no_quoting():
    for limit in rows():
        assert limit.key.startswith(limit.table)
        assert not set(limit.key) & set(" ()&;<>*?'\"$`|\\")


def test_keys_are_unique():
    keys = [limit.key for limit in rows()]
    assert len(set(keys)) == len(keys)


def test_every_value_is_an_exact_number_with_a_unit():
    for limit in rows():
        assert exact(limit.value.text) > 0
        assert limit.value.unit.strip()
        assert limit.applies


def test_unknown_key_lists_near_ones():
    with pytest.raises(RecordMissing, match=r"40CFR433\.17/cadmium/daily"):
        row("40CFR433.17/cadmium")


def test_key_like_none_lists_the_tables():
    with pytest.raises(RecordMissing, match=r"near ones are 40CFR433\.15, 40CFR433\.17"):
        row("?")


def test_unknown_table_lists_the_tables():
    with pytest.raises(RecordMissing, match=r"the tables are 40CFR433\.15, "):
        rows("40CFR999")

"""What somebody could do to a ledger with other tools, and what is said of it first."""

from __future__ import annotations

FAR = "f" * 64
_SWAP = 'CASE "row" WHEN 1 THEN {} WHEN 3 THEN {} ELSE {} END'

TAMPERINGS: dict[str, tuple[list[str], str]] = {
    "changed text": (
        ["UPDATE result SET text = '0.01' WHERE \"row\" = 2"],
        "entry 5: changed row: result rows 1 to 3",
    ),
    "changed double": (
        ['UPDATE result SET value = 0.10999999999999999 WHERE "row" = 2'],
        "entry 5: changed row: result rows 1 to 3",
    ),
    "emptied cell": (
        ["UPDATE sample SET laboratory = NULL"],
        "entry 4: changed row: sample row 1",
    ),
    "row given to another entry": (
        ['UPDATE result SET entry = 7 WHERE "row" = 3'],
        "entry 5: changed row: result rows 1 to 3",
    ),
    "changed number of the ledger": (
        ["UPDATE ledger SET number = 'ffffffffffff'"],
        "entry 1: changed row: ledger row 1",
    ),
    "missing row within": (
        ['DELETE FROM result WHERE "row" = 2'],
        "entry 5: missing row: result row 2",
    ),
    "missing row at the end": (
        ['DELETE FROM result WHERE "row" = 4'],
        "entry 7: missing row: result row 4",
    ),
    "missing rows": (
        ['DELETE FROM result WHERE "row" < 4'],
        "entry 5: missing row: result rows 1 to 3",
    ),
    "every row of a table missing": (
        ["DELETE FROM ledger"],
        "entry 1: missing row: ledger row 1",
    ),
    "added row": (
        ["INSERT INTO result_void VALUES (1, 5, 1)"],
        "entry 5: added row: result_void row 1",
    ),
    "added version": (
        ["INSERT INTO person VALUES (3, 1, 'person/MS', 3, 0, 'Somebody Else', '')"],
        "entry 1: added row: person row 3",
    ),
    "added row before the first": (
        ["INSERT INTO result_void VALUES (0, 5, 1)"],
        "entry 5: added row: result_void row 0",
    ),
    "added rows": (
        ["INSERT INTO result_void VALUES (1, 5, 1)", "INSERT INTO result_void VALUES (7, 5, 2)"],
        "entry 5: added row: result_void rows 1 to 7, 2 of them,",
    ),
    "reordered rows": (
        [
            f"UPDATE result SET text = {_SWAP.format(repr('110'), repr('0.05'), 'text')}, "
            f"number = {_SWAP.format(repr('110'), repr('0.05'), 'number')}, "
            f"value = {_SWAP.format('110.0', '0.05', 'value')}"
        ],
        "entry 5: reordered: result rows 1 to 3",
    ),
    "missing entry": (
        ["DELETE FROM entry WHERE sequence = 4"],
        "entry 4: missing entry: after the gap comes entry 5",
    ),
    "missing entry and its rows": (
        ["DELETE FROM entry WHERE sequence = 6", "DELETE FROM person WHERE entry = 6"],
        "entry 6: missing entry: after the gap comes entry 7",
    ),
    "missing first entry": (
        ["DELETE FROM entry WHERE sequence = 1"],
        "entry 1: missing entry: after the gap comes entry 2",
    ),
    "missing last entry": (
        ["DELETE FROM entry WHERE sequence = 7"],
        "entry 7: missing entry: result row 4 names it",
    ),
    "no entries": (
        ["DELETE FROM entry"],
        "entry 1: missing entry: ledger row 1 names it",
    ),
    "reordered entries": (
        [
            "UPDATE entry SET sequence = 1004 WHERE sequence = 4",
            "UPDATE entry SET sequence = 4 WHERE sequence = 6",
            "UPDATE entry SET sequence = 6 WHERE sequence = 1004",
        ],
        "entry 4: reordered: by its digest it follows entry 5",
    ),
    "renumbered entry": (
        ["UPDATE entry SET sequence = 0 WHERE sequence = 1"],
        "entry 1: missing entry: after the gap comes entry 2",
    ),
    "changed reason": (
        ["UPDATE entry SET reason = 'another' WHERE sequence = 3"],
        "entry 3: changed entry: its header does not give its digest",
    ),
    "changed person": (
        ["UPDATE entry SET recorded_by = 'XX' WHERE sequence = 3"],
        "entry 3: changed entry: its header does not give its digest",
    ),
    "changed time": (
        ["UPDATE entry SET recorded_at = '2026-02-01T00:00:00.000000Z' WHERE sequence = 3"],
        "entry 3: changed entry: its header does not give its digest",
    ),
    "changed digest": (
        [f"UPDATE entry SET digest = '{FAR}' WHERE sequence = 3"],
        "entry 3: changed entry: its header does not give its digest",
    ),
    "changed link": (
        [f"UPDATE entry SET previous_digest = '{FAR}' WHERE sequence = 3"],
        "entry 3: changed entry: it follows a digest that no entry has",
    ),
    "emptied contents": (
        ["UPDATE entry SET contents = '[]' WHERE sequence = 2"],
        "entry 2: changed entry: its header does not give its digest",
    ),
    "contents further on": (
        ["UPDATE entry SET contents = replace(contents, '\"result\",4', '\"result\",5') WHERE sequence = 7"],
        "entry 7: changed entry: its header does not give its digest",
    ),
}

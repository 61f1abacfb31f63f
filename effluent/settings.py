"""Names of environment variables and of the fixed sentences every face shows."""

from __future__ import annotations

__all__ = ["CAUTION", "LEDGER_VARIABLE", "PERSON_VARIABLE"]

LEDGER_VARIABLE = "EFFLUENT_LEDGER"
PERSON_VARIABLE = "EFFLUENT_BY"

CAUTION = (
    "Local environmental regulations govern. This record supports, and never replaces, "
    "the judgement of licensed or otherwise qualified people."
)

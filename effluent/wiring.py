"""The one place where settings, database, clock and services meet."""

from __future__ import annotations

from effluent.services.ledger import open_ledger

__all__ = ["open_ledger"]

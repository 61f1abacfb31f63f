"""The ledger file: the only SQL."""

"""Pure numerics: units, balances, verdicts."""

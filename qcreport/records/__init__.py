"""Archive, ledger, report numbers and the measurement store."""

"""All writes: keyword-only, one transaction each, with their ledger row inside."""

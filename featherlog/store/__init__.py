"""The database: the append-only ledger, the projections written with it, and migrations."""

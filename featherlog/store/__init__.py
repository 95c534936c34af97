"""The append-only ledger, the projections made from it, and the database that keeps both."""

"""Which position each fraction gets, on which days, and what differs in the record."""

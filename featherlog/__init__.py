"""featherlog: where the junction of matched fields is today, why, and what it has added up to."""

__version__ = "0.1.0"

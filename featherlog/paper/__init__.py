"""Sheets and summaries on paper, drawn from the same records as screens and JSON."""

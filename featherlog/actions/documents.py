"""Documents that need no database: JSON of any view, and the file templates."""

from featherlog.exchange.template import DESIGN_TEMPLATE, MACHINE_TEMPLATE, POLICY_TEMPLATE
from featherlog.exchange.to_json import to_json

__all__ = ["TEMPLATES", "to_json"]

TEMPLATES = {"design": DESIGN_TEMPLATE, "machine": MACHINE_TEMPLATE, "policy": POLICY_TEMPLATE}
"""The commented templates by kind of file."""

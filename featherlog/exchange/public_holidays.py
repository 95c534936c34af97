"""Public holidays of a country or one of its regions, as the ``holidays`` package knows them."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING

from featherlog.exchange.kinds import Kind, either

if TYPE_CHECKING:
    from datetime import date

    from holidays import HolidayBase

    from featherlog.exchange.toml_fields import Table

_YEARS = 3  # the year of the start date and two more: longer than any course


def read_holidays(table: Table | None, first_year: int) -> tuple[str, tuple[date, ...]]:
    """Read which public holidays count: the calendar's name, and its days from a year on."""
    if table is None:
        return "", ()
    country = table.take("country", _COUNTRY)
    region = table.take_or("region", _region(country), None)
    calendar = _calendar(country, region, range(first_year, first_year + _YEARS))
    name = country if region is None else f"{country}, {region}"
    return name, tuple(sorted(calendar)) if calendar is not None else ()


def _known_country(raw: object) -> str | None:
    if not isinstance(raw, str) or not re.fullmatch("[A-Z]{2}", raw):
        return None
    return None if _calendar(raw, None, ()) is None else raw


_COUNTRY = Kind(
    'the two capital letters of a country whose holidays are known, like "DE"', _known_country, ""
)


def _region(country: str) -> Kind[str]:
    """Return the kind of a region; any passes where the country is itself at fault."""
    calendar = _calendar(country, None, ())
    regions = calendar.subdivisions if calendar is not None else ()

    def read(raw: object) -> str | None:
        known = isinstance(raw, str) and (raw in regions or calendar is None)
        return str(raw) if known else None

    allowed = f"left out, as {country} has no regions with holidays of their own"
    return Kind(either(regions) if regions else allowed, read, "")


def _calendar(country: str, region: str | None, years: range | tuple[()]) -> HolidayBase | None:
    import holidays  # noqa: PLC0415 - slow to import, and only designs that name a country need it

    try:
        return holidays.country_holidays(country, subdiv=region or None, years=years)
    except NotImplementedError:
        return None

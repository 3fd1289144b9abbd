"""The prices of one study: where they stand, and that they stand in one currency."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence

from yieldosc.errors import Place
from yieldosc.quantities import QuantityError
from yieldosc.sheets.bomline import BomLine
from yieldosc.sheets.entries import Entry, Problems, faulty
from yieldosc.sheets.headings import heading_key
from yieldosc.sheets.price_text import CODES, parse_price

_HEADINGS = (  # of one part; from the most exact to the least
    "unit price|price per unit|price per piece|price per part|price each|price ea|each price|unit cost|cost each|"
    "cost per unit|cost per part|einzelpreis|stückpreis|stuckpreis|preis stück|prix unitaire|precio unitario|"
    "preço unitário|prezzo unitario|цена за шт|单价|単価",
    "price|cost|preis|kosten|prix|precio|preço|prezzo|цена|价格",
)
_OF_CURRENCY = re.compile(rf"\s(?:in\s)?(?:{CODES}|euro?s?|dollars?)$", re.IGNORECASE)
NO_PRICE = ("", "-", "–", "n/a", "na", "tbd", "?", "none")


class PriceReader:
    """Reads the prices of one study and remembers the currencies that it met."""

    def __init__(self, problems: Problems) -> None:
        self.problems = problems
        self.currencies: dict[str, Place] = {}

    def read(self, entry: Entry, name: str) -> float | None:
        """The price in a cell; None with a finding."""
        if faulty(entry, name, self.problems):
            return None
        try:
            price, currency = parse_price(entry.written)
        except QuantityError as error:
            self.problems.error("unreadable", f"{name}: {error}", entry.place)
            return None
        self._met(currency, entry.place)
        return price

    def note(self, text: str, place: Place) -> None:
        """Remembers the currency of a price that was read elsewhere."""
        try:
            self._met(parse_price(text)[1], place)
        except QuantityError:
            return  # said where it was read

    def of_bom(self, parts: Sequence[str], lines: Mapping[str, BomLine]) -> dict[str, float]:
        """Designator → price of one part, where the BOM has a column of such prices. What is no price is left out."""
        found = {}
        for part in parts:
            line = lines.get(part)
            heading = None if line is None else price_heading(tuple(line.row_cells))
            if line is None or heading is None or line.row_cells[heading].strip().casefold() in NO_PRICE:
                continue
            place = Place(line.place.sheet, line.place.row)
            try:
                found[part], currency = parse_price(line.row_cells[heading])
            except QuantityError as error:
                self.problems.add("warning", "price-unread", f"{part} {heading}: {error}; it is left out", place)
                continue
            self._met(currency, place)
        return found

    def compare(self) -> None:
        """Money in two currencies cannot be added."""
        named = {currency: place for currency, place in self.currencies.items() if currency}
        if len(named) > 1:
            listed = ", ".join(f"{currency} ({place})" for currency, place in named.items())
            self.problems.error(
                "two-currencies",
                f"the prices stand in several currencies: {listed}; write all of them in one",
                list(named.values())[1],
            )

    def _met(self, currency: str, place: Place) -> None:
        self.currencies.setdefault(currency, place)


def price_heading(headings: Sequence[str]) -> str | None:
    """The heading over prices of one part; prices of a line, of all parts or at a quantity are left alone."""
    keys = {heading: _OF_CURRENCY.sub("", heading_key(heading)) for heading in headings}
    for accepted in _HEADINGS:
        for heading, key in keys.items():
            if key in accepted.split("|"):
                return heading
    return None

"""The text of a price: a number of zero or more, with or without a currency."""

from __future__ import annotations

import re

from yieldosc.quantities import QuantityError, normal, parse_quantity, shown

_SIGNS = {"€": "EUR", "$": "USD", "US$": "USD", "£": "GBP", "¥": "JPY", "руб": "RUB", "₽": "RUB", "元": "CNY"}
CODES = "EUR|USD|GBP|CHF|JPY|CNY|SEK|NOK|DKK|PLN|CZK|HUF|CAD|AUD|NZD|INR|KRW|BRL|RUB|TWD|HKD|SGD|MXN|ZAR"
_CURRENCY = rf"(?:{CODES}|US\$|[€$£¥₽元]|руб\.?)"
_PRICE = re.compile(
    rf"(?P<before>{_CURRENCY})?\s?(?P<number>\d[\d., ]*|[.,]\d+)\s?(?P<after>{_CURRENCY})?", re.IGNORECASE
)


def parse_price(text: str) -> tuple[float, str]:
    """The number, and the currency's code ("" where the text names none). QuantityError otherwise."""
    found = _PRICE.fullmatch(normal(text))
    if found is None or (found["before"] and found["after"]):
        raise QuantityError(f'{shown(text)} is no price of zero or more; write for example "0.12"')
    named = (found["before"] or found["after"] or "").upper().rstrip(".")
    return parse_quantity(found["number"].strip()).value, _SIGNS.get(named, _SIGNS.get(named.lower(), named))

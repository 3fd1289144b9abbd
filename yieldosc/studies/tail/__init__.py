"""Small failure rates: subset simulation finds the regions, importance sampling on fresh draws gives the figure."""

from yieldosc.studies.tail.rate import SmallRate, small_rate

__all__ = ["SmallRate", "small_rate"]

"""Round values for a value axis. No Qt."""

from math import ceil, floor, log10


def value_ticks(low: float, high: float, height: float, least: float) -> tuple[list[float], int]:
    """Round values from `low` to `high`, at least `least` pixels apart on `height` pixels, and the decimals
    that tell them apart.

    >>> value_ticks(7.1, 7.5, 160, 30)
    ([7.1, 7.2, 7.3, 7.4, 7.5], 1)
    >>> value_ticks(0, 60, 100, 30)
    ([0.0, 20.0, 40.0, 60.0], 0)
    """
    if not low < high:
        raise ValueError(f"range from {low:g} to {high:g}: the low end must lie below the high end")
    rough = (high - low) * max(least, 1.0) / max(height, 1.0)
    power = floor(log10(rough))
    step, decimals = 10.0 ** (power + 1), max(-(power + 1), 0)
    for factor in (1, 2, 5):
        if factor * 10.0**power >= rough * (1 - 1e-9):
            step, decimals = factor * 10.0**power, max(-power, 0)
            break
    first, last = ceil(low / step - 1e-9), floor(high / step + 1e-9)
    return [round(k * step, decimals + 2) for k in range(first, last + 1)], decimals


def value_word(value: float, decimals: int) -> str:
    """A value with its decimals, halves away from zero as people round, and a true minus sign.

    >>> value_word(0.125, 2), value_word(-3.0, 0), value_word(7.4, 2)
    ('0.13', '\u22123', '7.40')
    """
    from decimal import ROUND_HALF_UP, Decimal

    word = str(Decimal(repr(float(value))).quantize(Decimal(1).scaleb(-decimals), rounding=ROUND_HALF_UP))
    if word.startswith("-"):
        word = word[1:] if float(word) == 0 else "\u2212" + word[1:]
    return word

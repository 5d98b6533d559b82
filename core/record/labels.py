"""Labels of episodes, as people compare them."""


def alike(label: str) -> str:
    """A label without case and extra blanks.

    >>> alike("  Bed  4 ")
    'bed 4'
    """
    return " ".join(label.split()).casefold()

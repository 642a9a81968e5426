"""Words for reasons."""


def counted(number: int, what: str) -> str:
    """Return a number with the noun it counts: `what` names one thing and takes an s for any other number."""
    return f"{number:,} {what}" if number == 1 else f"{number:,} {what}s"


def verb(number: int, one: str, many: str) -> str:
    """Return the form of a verb that goes with so many things."""
    return one if number == 1 else many


def fill_needed(least: int, most: int) -> str:
    """Say that a fill budget cannot suffice."""
    return (
        f"fill budget: at least {counted(least, 'fill edge')} {verb(least, 'is', 'are')} needed,"
        f" {most:,} {verb(most, 'is', 'are')} allowed"
    )


def fill_found(found: int, most: int, least: int) -> str:
    """Say that the fill found is above its budget, and how much less may do."""
    return (
        f"fill budget: {counted(found, 'fill edge')} {verb(found, 'was', 'were')} found,"
        f" {most:,} {verb(most, 'is', 'are')} allowed, at least {least:,} {verb(least, 'is', 'are')} needed"
    )

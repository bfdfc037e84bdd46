"""Least sizes of what is punched, for one sheet. Common practice, no source."""


class PunchSizes:
    """Sizes that follow from the sheet's thickness, in m."""

    __slots__ = ()
    sheet: float

    @property
    def least_radius(self) -> float:
        """Least radius of a punch's corner."""
        return 0.5 * self.sheet

    @property
    def least_edge(self) -> float:
        """Least length of an edge of an outline."""
        return 0.1 * self.sheet

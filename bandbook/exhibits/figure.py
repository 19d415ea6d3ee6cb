"""A figure: SVG text with the words that belong to it."""

from dataclasses import dataclass
from typing import Any


@dataclass(frozen=True)
class Figure:
    """One picture.

    Attributes:
        name: File name without ending, unique in its study, such as ``"bands"``.
        svg: The picture; colours by custom property with a fallback, so that it follows light and dark when inlined.
        alt: What it shows, for those who cannot see it, with the numbers.
        caption: What it says, one or two sentences with the numbers.
    """

    name: str
    svg: str
    alt: str
    caption: str

    def as_dict(self) -> dict[str, Any]:
        """Return the figure as plain JSON."""
        return {"name": self.name, "svg": self.svg, "alt": self.alt, "caption": self.caption}

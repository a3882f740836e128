"""Answers that are looked at: pictures and pages. A notebook shows them by itself."""

import os
from typing import Optional, Union


class Picture:
    """A picture as SVG or PNG."""

    def __init__(self, data: bytes, media_type: str) -> None:
        self.data = data
        self.media_type = media_type

    def save(self, path: Union[str, "os.PathLike[str]"]) -> None:
        """Writes the picture to a file."""
        with open(path, "wb") as file:
            file.write(self.data)

    def _repr_svg_(self) -> Optional[str]:
        return self.data.decode() if self.media_type == "image/svg+xml" else None

    def _repr_png_(self) -> Optional[bytes]:
        return self.data if self.media_type == "image/png" else None

    def __repr__(self) -> str:
        return f"<Picture {self.media_type}, {len(self.data)} bytes>"


class Page:
    """A self-contained HTML page."""

    def __init__(self, html: str) -> None:
        self.html = html

    def save(self, path: Union[str, "os.PathLike[str]"]) -> None:
        """Writes the page to a file."""
        with open(path, "w", encoding="utf-8") as file:
            file.write(self.html)

    def __repr__(self) -> str:
        return f"<Page, {len(self.html)} characters>"

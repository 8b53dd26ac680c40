"""The only way in for anything a page asks for: our own fonts, and nothing else."""

from __future__ import annotations

from typing import Any

from weasyprint.urls import FatalURLFetchingError, URLFetcher, URLFetcherResponse

from qcreport.report.assets import FONT_FILES, SCHEME, font_bytes


class RefusedFetchError(FatalURLFetchingError):  # type: ignore[misc] # the base has no types
    """A page asked for something that is not ours; the rendering stops."""

    def __init__(self, url: str) -> None:
        super().__init__(f"a page asked for {url[:120]!r}")


class OwnAssetsFetcher(URLFetcher):  # type: ignore[misc] # the base has no types
    """Serves pinned fonts by name and refuses every other address."""

    def __init__(self) -> None:
        super().__init__(allowed_protocols=(), allow_redirects=False, fail_on_errors=True)
        self.refused: list[str] = []

    def fetch(self, url: str, headers: Any = None) -> URLFetcherResponse:
        """Return one of our own fonts, or stop."""
        name = url.removeprefix(SCHEME)
        if not url.startswith(SCHEME) or name not in FONT_FILES:
            self.refused.append(url)  # a drawing inside a drawing swallows the error
            raise RefusedFetchError(url)
        return URLFetcherResponse(url, font_bytes(name), {"Content-Type": "font/ttf"})

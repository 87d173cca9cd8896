"""RFC 3161 time stamps from an authority on the network."""

from __future__ import annotations

from urllib.parse import urlsplit

from pyhanko.sign.timestamps import TimeStamper
from pyhanko.sign.timestamps.requests_client import HTTPTimeStamper

from reportgen.errors import SignatureError

_SECONDS = 20


def http_timestamper(url: str) -> TimeStamper:
    """Give a time stamper that asks the authority at ``url``.

    Raises
    ------
    SignatureError
        The address is not one of http or https.
    """
    parts = urlsplit(url)
    if parts.scheme not in ("http", "https") or not parts.netloc:
        raise SignatureError(
            f"{url!r} is no address of a time-stamping authority; it begins with http or https"
        )
    return HTTPTimeStamper(url, timeout=_SECONDS)  # type: ignore[no-untyped-call]

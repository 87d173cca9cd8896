"""From executed notebook to HTML and PDF, out of one document structure."""

from reportgen.publish.api import Published, publish
from reportgen.publish.house import House, read_house

__all__ = ["House", "Published", "publish", "read_house"]

"""From executed notebook to HTML and PDF, out of one document structure."""

from reportgen.publish.api import Published, publish
from reportgen.publish.house import House, house_files, read_house

__all__ = ["House", "Published", "house_files", "publish", "read_house"]

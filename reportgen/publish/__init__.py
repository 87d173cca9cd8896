"""From executed notebook to HTML and PDF, out of one document structure."""

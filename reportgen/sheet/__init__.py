"""What a template may show: givens, equation lines, tables, figures, verdicts, cautions."""

from reportgen.sheet.sheet import Sheet

__all__ = ["Sheet"]

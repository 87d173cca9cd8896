"""What a template may show: givens, equation lines, tables, figures, verdicts, cautions."""

"""Run templates over case files, with our own account of every cell."""

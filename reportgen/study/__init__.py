"""Tolerance studies: rotors drawn from the tolerances of a case, each judged by its limits."""

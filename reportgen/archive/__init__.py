"""What is asked of finished packages: verify, rerun, compare, register."""

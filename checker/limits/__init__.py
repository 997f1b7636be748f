"""Hold the tables and formulas of published limits, each set apart and each table cited."""

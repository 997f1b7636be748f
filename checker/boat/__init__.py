"""Assemble hulls: parts, class, options and as-built changes to frozen boats."""

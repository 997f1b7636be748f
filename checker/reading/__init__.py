"""Read a yard's files: text to data with positions, quantities, schemas."""

"""Lines: species, the catalogue, level physics and predicted strengths."""

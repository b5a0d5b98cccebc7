"""Water treatment as arithmetic on conserved totals: analyses, blending, chemicals, steps, units."""

"""W/m2 that reach the cells: weather and a panel in, `Light` per heading out."""

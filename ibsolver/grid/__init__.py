"""Where the unknowns sit: stretched rectilinear staggered grids. Imports `errors` only."""

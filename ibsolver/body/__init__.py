"""Geometry of bodies: what lies where, which points carry force, how they move. Imports grid, case.model, errors."""

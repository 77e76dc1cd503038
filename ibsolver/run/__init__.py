"""Assemble, march, record: the loop around the solver. Imports everything left of the run directory."""

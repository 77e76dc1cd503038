"""Figures: the only room that imports matplotlib."""

"""The commands room; see ibsolver/__init__.py for the map."""

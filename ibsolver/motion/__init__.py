"""The motion room; see ibsolver/__init__.py for the map."""

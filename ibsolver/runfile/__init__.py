"""The run directory: the only room that knows HDF5. Takes named arrays and plain numbers, never solver classes."""

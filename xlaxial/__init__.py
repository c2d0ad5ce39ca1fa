"""Worksheet functions for schedules of restrained axial members.

The package is light to import: numerical libraries load with the first function that needs them.
"""

from xlaxial.cells import Cell, CellError, CellRange

__version__ = "0.1.0"

__all__ = ["Cell", "CellError", "CellRange", "__version__"]

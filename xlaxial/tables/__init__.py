"""Blocks of cells to typed SI columns with cell addresses, and results back to blocks of cells."""

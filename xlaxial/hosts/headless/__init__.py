"""Workbooks without a spreadsheet program: read by openpyxl, evaluated by an engine, patched in place."""

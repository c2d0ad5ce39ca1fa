"""Tabulated data as CSV files, each row with its source; no other module holds a published number."""

"""Members as arrays: nodes, bars, supports, actions; no spreadsheet, heading or unit is known here."""

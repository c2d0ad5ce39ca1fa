"""Formulas as workbooks store them, made ready for the engine: one module per concern, `rewrite` puts them together."""

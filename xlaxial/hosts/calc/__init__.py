"""LibreOffice Calc: an extension made from the registry, whose component runs the functions inside the office."""

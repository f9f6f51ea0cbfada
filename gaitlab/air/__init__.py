"""Air through ducts, valves and supplies: exact where it is checked, fast and smooth where it is integrated."""

"""What parts can stand and how they behave: sheet, types, styles, policies, series."""

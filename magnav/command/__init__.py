"""The command `magnav`: arguments in, text, JSON and CSV out. No formulas live here."""

"""Error models of the field, and the budget that combines them with the rest."""

"""Many cases at once: one JSON case a line in, one folder a case and a table out. Can be stopped and resumed."""

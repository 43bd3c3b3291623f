"""Small widgets. They take values by property, give them back by callback, and know neither case nor planner."""

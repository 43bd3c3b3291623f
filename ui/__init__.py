"""The app: shows and collects. Clinical numbers come from planner and are never computed here."""

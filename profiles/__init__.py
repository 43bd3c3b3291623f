"""Data a clinician could read and correct: read with planner.catalogue, shipped with the program."""

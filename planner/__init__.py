"""Front door of the planner: a Case goes in, a Plan comes out."""

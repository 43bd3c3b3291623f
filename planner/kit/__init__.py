"""What to carry: cylinders, concentrators, batteries, how long they last, and the set that covers the trip."""

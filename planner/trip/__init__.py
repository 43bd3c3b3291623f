"""When and where: the parts of the trip in time, the places, and the chance of being late."""

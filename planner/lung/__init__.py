"""The lung: from the air breathed to the blood, for one person, in numbers and arrays alone."""

"""What guidelines say: pathways as data, cautions with intervals, the hypoxic challenge test."""

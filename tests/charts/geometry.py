"""Where the items of a drawing lie, worked out from the drawing alone."""

import numpy as np

from planner.charts.layout import Band, Box, Marker, Polyline, Text


def extent(item, measure):
    """Left, bottom, right, top of an item."""
    if isinstance(item, Text):
        wide = measure(item.text, item.size)
        left = item.x - {"left": 0.0, "middle": wide / 2, "right": wide}[item.anchor]
        return left, item.y - item.size / 2, left + wide, item.y + item.size / 2
    if isinstance(item, Box):
        return item.x, item.y, item.x + item.width, item.y + item.height
    if isinstance(item, Marker):
        return item.x - item.radius, item.y - item.radius, item.x + item.radius, item.y + item.radius
    points = item.points if isinstance(item, Polyline) else item.outline()
    assert isinstance(item, (Polyline, Band))
    assert np.isfinite(points).all()
    return (*points.min(axis=0), *points.max(axis=0))


def outside(drawing, measure, slack=0.01):
    """Items that reach out of the drawing."""
    found = []
    for item in drawing.items:
        left, bottom, right, top = extent(item, measure)
        if left < -slack or bottom < -slack or right > drawing.width + slack or top > drawing.height + slack:
            found.append(item)
    return found


def overlapping_texts(items, measure, slack=0.01):
    """Pairs of texts that lie on each other."""
    boxes = [(item.text, extent(item, measure)) for item in items if isinstance(item, Text)]
    return [
        (a, b)
        for i, (a, (l1, b1, r1, t1)) in enumerate(boxes)
        for b, (l2, b2, r2, t2) in boxes[i + 1 :]
        if min(r1, r2) - max(l1, l2) > slack and min(t1, t2) - max(b1, b2) > slack
    ]

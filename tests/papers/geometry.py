"""What a page shows and where, worked out from the paper's items and from the PDF itself."""

from io import BytesIO

from pypdf import PdfReader

from planner.charts.layout import Text
from planner.papers import fonts
from tests.charts.geometry import extent

SLACK = 0.01


def measured(item):
    """Left, bottom, right, top of an item with the fonts that print it; texts by the height of their letters."""
    if isinstance(item, Text):
        wide = fonts.width(fonts.printable(item.text), item.size, item.bold)
        left = item.x - {"left": 0.0, "middle": wide / 2, "right": wide}[item.anchor]
        return left, item.y - 0.45 * item.size, left + wide, item.y + 0.45 * item.size
    return extent(item, fonts.measure)


def beyond_margins(page, margin):
    """Texts that print nearer to the paper's edge than the margin."""
    found = []
    for item in page.items:
        if not isinstance(item, Text):
            continue
        left, bottom, right, top = measured(item)
        if min(left, bottom, page.width - right, page.height - top) < margin - SLACK:
            found.append(item.text)
    return found


def overlaps(page):
    """Pairs of texts printed on each other."""
    boxes = sorted(
        ((item.text, measured(item)) for item in page.items if isinstance(item, Text) and item.text.strip()),
        key=lambda pair: pair[1][0],
    )
    found = []
    for i, (a, (l1, b1, r1, t1)) in enumerate(boxes):
        for b, (l2, b2, r2, t2) in boxes[i + 1 :]:
            if l2 >= r1 - SLACK:
                break
            if min(r1, r2) - max(l1, l2) > 0.3 and min(t1, t2) - max(b1, b2) > 0.3:
                found.append((a, b))
    return found


def read(pdf):
    """The PDF and the text of each page, spaces and line ends made one space."""
    reader = PdfReader(BytesIO(pdf))
    return reader, [" ".join(page.extract_text().split()) for page in reader.pages]


def embedded_fonts(reader):
    """Font names of a PDF, with whether each brings its own glyphs."""
    found = {}
    for page in reader.pages:
        for font in page["/Resources"]["/Font"].values():
            font = font.get_object()
            descriptor = font["/FontDescriptor"].get_object() if "/FontDescriptor" in font else {}
            found[font["/BaseFont"]] = "/FontFile2" in descriptor
    return found

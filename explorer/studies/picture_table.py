"""What a picture shows as rows for a spreadsheet."""

from typing import Any

from explorer.studies.pictures import Axis, Line, Picture
from explorer.studies.sweep import headed, listed


def picture_table(picture: Picture, along: Axis) -> list[list[Any]]:
    """Rows of the curves of a picture, the heading first: the dial, every curve, the ends of its bands, why
    there is no answer; below them, after an empty row, each set of measured points."""
    columns = [[headed(along.name, along.unit), *listed(picture.x)]]
    columns += [_column(picture, line) for line in picture.lines]
    for layer in picture.fan:
        for end, values in (("low", layer.low), ("high", layer.high)):
            columns.append([f"{layer.percent:g} % of the outcomes, {end}", *listed(values)])
    columns += [_column(picture, line) for line in picture.others]
    if picture.gaps:
        columns.append(["No answer because", *(_reason(picture, x) for x in picture.x)])
    rows = [list(row) for row in zip(*columns, strict=True)]
    for dots in picture.dots:
        heading = [headed(along.name, along.unit), headed(f"{picture.title}, {dots.name}", picture.unit)]
        points = zip(listed(dots.x), listed(dots.y), strict=True)
        rows += [[], heading, *(list(point) for point in points)]
    return rows


def _reason(picture: Picture, x: float) -> str:
    return next((reason for start, stop, reason in picture.gaps if start <= x <= stop), "")


def _column(picture: Picture, line: Line) -> list[Any]:
    name = f"{picture.title}, {line.name}" if line.name else picture.title
    # Logarithms have no unit; the note of the picture says what they are of.
    logarithm = picture.note.split(" · ")[0] if picture.note.startswith("log") else ""
    return [headed(name, picture.unit or logarithm), *listed(line.y)]

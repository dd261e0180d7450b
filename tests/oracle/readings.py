"""Wide reading tables as the plants of this folder have them."""

import csv


def read(path):
    """A list of (time, {tag: number or None})."""
    with open(path, newline="") as file:
        rows = list(csv.reader(file))
    return [
        (row[0], {tag: float(cell) if cell else None for tag, cell in zip(rows[0][1:], row[1:])}) for row in rows[1:]
    ]


def write(path, tags, rows):
    """`rows` is a list of (time, [text, ...])."""
    with open(path, "w", newline="") as file:
        writer = csv.writer(file, lineterminator="\n")
        writer.writerow(["time", *tags])
        writer.writerows([time, *cells] for time, cells in rows)

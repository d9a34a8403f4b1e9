"""Hold the numbers on a page against the documents' own tables: page_numbers.py PAGE TABLE_CSV CAPTION PAIRS...

A pair is COLUMN=HEAD*FACTOR+OFFSET: column of the page's table (from 0), head of the CSV table, and what turns the table's
unit into the page's. A number on the page stands for all values that round to it, so the tolerance is half of its last place.
"""
import csv
import sys
from xml.etree import ElementTree

HTML = "{http://www.w3.org/1999/xhtml}"
RAISED = str.maketrans("⁰¹²³⁴⁵⁶⁷⁸⁹⁻", "0123456789-")


def number(text):
    """Value and half of the last place of a number as the page writes it; None where there is none."""
    text = text.split(" ±")[0].strip("()").replace("−", "-")
    if text in ("", "–"):
        return None
    mantissa, _, power = text.partition("×10")
    scale = 10.0 ** int(power.translate(RAISED) or 0)
    decimals = len(mantissa.partition(".")[2])
    return float(mantissa) * scale, 0.5000001 * 10.0**-decimals * scale


def main(page, table, caption, *pairs):
    tables = [
        found
        for found in ElementTree.parse(page).iter(HTML + "table")
        if "".join(found.find(HTML + "caption").itertext()).startswith(caption)
    ]
    if len(tables) != 1:
        sys.exit(f"{caption}: {len(tables)} such tables on the page")
    rows = tables[0].findall(f"{HTML}tbody/{HTML}tr")
    with open(table, encoding="utf-8") as file:
        values = list(csv.DictReader(file))
    if len(rows) < len(values) or not values:
        sys.exit(f"{caption}: {len(rows)} rows on the page, {len(values)} in the table")
    compared = 0
    for row, value in zip(rows, values):
        cells = ["".join(cell.itertext()) for cell in row.findall(HTML + "td")]
        for pair in pairs:
            column, _, rest = pair.partition("=")
            head, _, rest = rest.partition("*")
            factor, _, offset = rest.partition("+")
            shown = number(cells[int(column)])
            if shown is None or value[head] == "":
                continue
            expected = float(value[head]) * float(factor) + float(offset)
            if not abs(shown[0] - expected) <= shown[1]:
                sys.exit(f"{caption}: '{cells[int(column)]}' on the page, {expected} in the table ({head})")
            compared += 1
    print(f"{caption}: {compared} numbers compared")
    if compared < len(values):
        sys.exit(f"{caption}: only {compared} numbers compared")


main(*sys.argv[1:])

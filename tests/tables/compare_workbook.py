"""Reads a workbook back and compares it cell by cell with the CSV tables beside it.

usage: compare_workbook.py WRITER FOLDER
WRITER is the program that writes results into FOLDER. Exit status 77: openpyxl is not installed.
"""
import csv
import pathlib
import shutil
import subprocess
import sys

try:
    import openpyxl
except ImportError:
    print("skipped: python3-openpyxl is not installed")
    sys.exit(77)

SHEETS = ["acquisitions", "review", "waves", "origins", "fronts", "nuclei", "cycles"]


def as_number(text):
    try:
        return float(text)
    except ValueError:
        return None


def compare_cell(where, in_csv, in_book):
    """A number is a number in both, text is text, empty is empty."""
    if in_csv == "":
        assert in_book is None, f"{where}: {in_book!r} instead of empty"
    elif isinstance(in_book, (int, float)):
        assert as_number(in_csv) == in_book, f"{where}: {in_book!r} instead of {in_csv!r}"
    else:
        assert in_book.replace("\r\n", "\n") == in_csv.replace("\r\n", "\n"), \
            f"{where}: {in_book!r} instead of {in_csv!r}"


def compare_table(folder, book, name):
    sheet = book[name]
    with open(folder / f"{name}.csv", newline="", encoding="utf-8") as stream:
        rows = list(csv.reader(stream))
    assert sheet.max_row == len(rows), f"{name}: {sheet.max_row} rows instead of {len(rows)}"
    assert sheet.freeze_panes == "B2", f"{name}: the header is not frozen"
    assert sheet.auto_filter.ref is not None, f"{name}: no filter"
    kinds = {}
    for row_number, row in enumerate(rows[1:], start=2):
        for column, text in enumerate(row, start=1):
            value = sheet.cell(row_number, column).value
            compare_cell(f"{name} row {row_number} {rows[0][column - 1]}", text, value)
            if value is not None:
                kinds.setdefault(rows[0][column - 1], set()).add(type(value) is str)
    mixed = [column for column, types in kinds.items() if len(types) > 1 and column != "parent"]
    assert not mixed, f"{name}: numbers and text mixed in {mixed}"
    return sum(len(row) for row in rows[1:])


def main():
    writer, folder = sys.argv[1], pathlib.Path(sys.argv[2])
    shutil.rmtree(folder, ignore_errors=True)
    folder.mkdir(parents=True)
    subprocess.run([writer, str(folder)], check=True)
    book = openpyxl.load_workbook(folder / "workbook.xlsx")
    assert book.sheetnames == ["What was found"] + SHEETS + ["What the columns mean"]
    cells = sum(compare_table(folder, book, name) for name in SHEETS)
    acquisitions = book["acquisitions"]
    headings = [cell.value for cell in acquisitions[1]]
    assert acquisitions.cell(2, headings.index("Sheet: batch") + 1).value == "007"
    assert acquisitions.cell(2, headings.index("Sheet: tube_width_um") + 1).value == 200
    explained = {(row[0], row[1]) for row in
                 book["What the columns mean"].iter_rows(min_row=2, values_only=True)}
    for name in SHEETS + ["traces"]:
        with open(folder / f"{name}.csv", newline="", encoding="utf-8") as stream:
            for column in next(csv.reader(stream)):
                assert (name, column) in explained, f"{name} {column} is not explained"
    print(f"{cells} cells compared")


if __name__ == "__main__":
    main()

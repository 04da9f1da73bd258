"""Make the pictures of the documentation: the shipped scenario's workbook, as LibreOffice prints it.

Run in the project's folder, with the test extra installed: ``python docs/make_pictures.py``.
"""

import re
import subprocess
import sys
import tempfile
import zipfile
from pathlib import Path
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from tests.office import Office

PICTURES = Path(__file__).parent / "pictures"
# page of the printed workbook -> name of the picture
PAGES = {"Summary": "summary", "Strips": "strips", "Aircraft": "aircraft", "Manual": "manual", "Day": "day", "Rules": "rules",
         "Left out": "left-out", "Method": "method"}  # fmt: skip
# the workbooks for people: the command that makes one, and the same for its pages
BOOKS = {
    ("trip", "--demo"): {"Trip": "trip", "Kneeboard": "kneeboard"},
    ("whatif", "--demo"): {"What if": "what-if", "Charts": "what-if-charts"},
    ("register", "--demo"): {"Register": "operator-register", "Fleet": "operator-fleet", "Months": "operator-months"},
}
DPI = 110


def main() -> None:
    """Fill the demo workbook and keep the first page of each sheet, cut to what is printed on it."""
    sys.path.insert(0, str(Path(__file__).parents[1]))
    from stripcheck.cli import main as stripcheck
    from tests.office import Office

    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        stripcheck(["demo", "-o", str(folder / "demo.xlsx"), "--quiet"])
        with Office() as office:
            _pictures(office, folder / "demo.xlsx", PAGES)
            for arguments, pages in BOOKS.items():
                stripcheck([*arguments, "-o", str(folder / f"{arguments[0]}.xlsx")])
                _pictures(office, folder / f"{arguments[0]}.xlsx", pages)
        stripcheck(["door", "lambda", "-o", str(folder / "library.xlsx")])
        _without_formulas(folder / "library.xlsx", folder / "kept.xlsx")
        with Office() as office:
            book = office.open(folder / "kept.xlsx")
            book.pdf(folder / "library.pdf")
            book.close()
        _picture(folder / "library.pdf", 1, PICTURES / "lambda-library.png")


def _pictures(office: "Office", path: Path, pages: dict[str, str]) -> None:
    """The first printed page of each of these sheets of a workbook."""
    book, pdf = office.open(path), path.with_suffix(".pdf")
    book.recalculate()
    book.pdf(pdf)
    book.close()
    kept: set[str] = set()
    for page in range(1, int(_told(["pdfinfo", str(pdf)], "Pages:")) + 1):
        text = subprocess.run(["pdftotext", "-f", str(page), "-l", str(page), "-layout", str(pdf), "-"],
                              check=True, capture_output=True, text=True).stdout  # fmt: skip
        sheet = next((title for title in pages if text.rstrip().splitlines()[-1].strip().startswith(title)), None)
        if sheet is not None and sheet not in kept:
            kept.add(sheet)
            _picture(pdf, page, PICTURES / f"{pages[sheet]}.png")
    missing = set(pages) - kept
    if missing:
        raise SystemExit(f"no page found for: {', '.join(sorted(missing))}")


def _without_formulas(path: Path, target: Path) -> None:
    """A copy with the values kept in the file alone: LibreOffice has no LAMBDA, and would print errors."""
    with zipfile.ZipFile(path) as source, zipfile.ZipFile(target, "w") as copy:
        for part in source.namelist():
            data = source.read(part)
            if part == "xl/worksheets/sheet1.xml":
                data = re.sub(rb"<f[ >].*?</f>", b"", data).replace(b' cm="1"', b"")
            copy.writestr(part, data)


def _told(command: list[str], label: str) -> str:
    lines = subprocess.run(command, check=True, capture_output=True, text=True).stdout.splitlines()
    return next(line.split(label)[1].strip() for line in lines if label in line)


def _picture(pdf: Path, page: int, target: Path) -> None:
    """One page as a PNG, without its empty margins."""
    from PIL import Image, ImageChops

    subprocess.run(["pdftoppm", "-r", str(DPI), "-png", "-singlefile", "-f", str(page), "-l", str(page), str(pdf),
                    str(target.with_suffix(""))], check=True)  # fmt: skip
    with Image.open(target) as image:
        plain = image.convert("RGB")
        body = plain.crop((0, 0, plain.width, int(plain.height * 0.93)))  # without the footer
        box = ImageChops.difference(body, Image.new("RGB", body.size, "white")).getbbox()
        left, top, right, bottom = box or (0, 0, *body.size)
        edge = 12
        corner = min(right + edge, body.width), min(bottom + edge, body.height)
        body.crop((max(left - edge, 0), max(top - edge, 0), *corner)).quantize(64).save(target, optimize=True)


if __name__ == "__main__":
    main()

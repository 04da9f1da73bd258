"""Make the pictures of the documentation: the shipped scenario's workbook, as LibreOffice prints it.

Run in the project's folder, with the test extra installed: ``python docs/make_pictures.py``.
"""

import re
import subprocess
import sys
import tempfile
import zipfile
from pathlib import Path

PICTURES = Path(__file__).parent / "pictures"
# page of the printed workbook -> name of the picture
PAGES = {"Summary": "summary", "Strips": "strips", "Aircraft": "aircraft", "Manual": "manual", "Day": "day", "Rules": "rules",
         "Left out": "left-out", "Method": "method"}  # fmt: skip
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
            book = office.open(folder / "demo.xlsx")
            book.recalculate()
            book.pdf(folder / "demo.pdf")
            book.close()
        pages = int(_told(["pdfinfo", str(folder / "demo.pdf")], "Pages:"))
        kept: set[str] = set()
        for page in range(1, pages + 1):
            text = subprocess.run(["pdftotext", "-f", str(page), "-l", str(page), "-layout", str(folder / "demo.pdf"), "-"],
                                  check=True, capture_output=True, text=True).stdout  # fmt: skip
            sheet = next((title for title in PAGES if text.rstrip().splitlines()[-1].strip().startswith(title)), None)
            if sheet is None or sheet in kept:
                continue
            kept.add(sheet)
            _picture(folder / "demo.pdf", page, PICTURES / f"{PAGES[sheet]}.png")
        missing = set(PAGES) - kept
        if missing:
            raise SystemExit(f"no page found for: {', '.join(sorted(missing))}")
        stripcheck(["door", "lambda", "-o", str(folder / "library.xlsx")])
        _without_formulas(folder / "library.xlsx", folder / "kept.xlsx")
        with Office() as office:
            book = office.open(folder / "kept.xlsx")
            book.pdf(folder / "library.pdf")
            book.close()
        _picture(folder / "library.pdf", 1, PICTURES / "lambda-library.png")


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

"""Make the pictures of docs/calc.md: a sheet that uses the functions, and Calc's function wizard on one of them.

Run in the project's folder as ``python docs/make_calc_pictures.py``, with the test extra installed, and LibreOffice, Xvfb and
ImageMagick's ``import`` on the machine (Debian: ``xvfb imagemagick``). The strips in it are invented.
"""

import os
import subprocess
import sys
import tempfile
import time
from pathlib import Path

PICTURES = Path(__file__).parent / "pictures"
FONT = "DejaVu Sans"
SIZE = "1120x760"
# run by LibreOffice's Python: open a book in a window, put the cursor on a formula, start the wizard
SHOW = """
import sys, time
import office_worker as worker
soffice, profile, extensions, book, done = sys.argv[1:]
worker.die_with_parent()
process, context = worker.start(soffice, profile, extensions, ["--norestore", "--nologo", "--nodefault"])
try:
    desktop = worker.service(context, "com.sun.star.frame.Desktop")
    document = desktop.loadComponentFromURL(worker.url(book), "_blank", 0, ())
    document.calculateAll()
    controller = document.CurrentController
    controller.Frame.ContainerWindow.setPosSize(0, 0, 1120, 760, 15)
    controller.select(controller.ActiveSheet.getCellRangeByName("F4"))
    time.sleep(3)
    helper = worker.service(context, "com.sun.star.frame.DispatchHelper")
    helper.executeDispatch(controller.Frame, ".uno:FunctionDialog", "", 0, ())
    time.sleep(5)
    open(done, "w").close()
    sys.stdin.read()
finally:
    process.kill()
"""

HEADER = ("Strip", "Elevation [ft]", "Length [m]", "Slope [%]", "Surface", "Density altitude [ft]", "Take-off verdict",
          "Margin [m]", "What limits it")  # fmt: skip
STRIPS = (("Heron Flat", 1250, 820, 0.5, "grass"), ("Cinder Ridge", 4100, 640, 4.0, "gravel"),
          ("Upper Lantern", 2900, 760, -1.5, "dirt"), ("Mill Bend", 600, 430, 1.0, "long grass"))  # fmt: skip


def book(path: Path) -> Path:
    """The sheet: conditions above, one row for each strip."""
    import openpyxl
    from openpyxl.styles import Alignment, Font, PatternFill
    from openpyxl.worksheet.properties import PageSetupProperties

    from stripcheck.caution import CAUTION

    made = openpyxl.Workbook()
    sheet = made.active
    sheet.title = "What if"
    sheet.append(["QNH [hPa]", 1008, "Temperature", "31 °C", "Mass", "2050 lb", "Flap", "10", "(invented strips)"])
    sheet.append([CAUTION])
    sheet.append(HEADER)
    call = '("ridge-runner",$F$1,$H$1,C{0},B{0},$B$1,$D$1,D{0},E{0},"part-cat-b")'
    for row, strip in enumerate(STRIPS, 4):
        sheet.append([*strip, f"=STRIP.DENSITY_ALT(B{row},$B$1,$D$1)",
                      *(f"=STRIP.TAKEOFF_{what}{call.format(row)}" for what in ("VERDICT", "MARGIN", "REASON"))])  # fmt: skip
        sheet[f"F{row}"].number_format = sheet[f"H{row}"].number_format = "0"
    for cell in (cell for row in sheet for cell in row):
        cell.font = Font(name=FONT, size=10)
    for cell in sheet[3]:
        cell.font, cell.fill = Font(name=FONT, size=10, bold=True), PatternFill("solid", fgColor="E7EBF0")
        cell.alignment = Alignment(wrap_text=True, vertical="top")
    sheet["A2"].font = Font(name=FONT, size=10, italic=True)
    sheet.row_dimensions[3].height = 28
    for letter, width in zip("ABCDEFGHI", (16, 12, 14, 10, 13, 12, 14, 10, 46), strict=True):
        sheet.column_dimensions[letter].width = width
    sheet.print_options.gridLines = sheet.print_options.headings = True
    sheet.page_setup.orientation = "landscape"
    sheet.page_setup.fitToHeight = 0
    sheet.sheet_properties.pageSetUpPr = PageSetupProperties(fitToPage=True)
    made.save(path)
    return path


def cut(picture: Path) -> None:
    """Take the empty margins away."""
    from PIL import Image, ImageChops

    with Image.open(picture) as image:
        plain = image.convert("RGB")
        body = plain.crop((0, int(plain.height * 0.07), plain.width, int(plain.height * 0.93)))
        left, top, right, bottom = ImageChops.difference(body, Image.new("RGB", body.size, "white")).getbbox()
        body.crop((left - 8, top - 8, right + 8, bottom + 8)).quantize(64).save(picture, optimize=True)


def wizard(folder: Path, extensions: Path, sheet: Path) -> None:
    """A picture of the function wizard, from a display that exists in memory only."""
    from tests.office import find_soffice, find_uno_python

    screen = subprocess.Popen(["Xvfb", "-displayfd", "1", "-screen", "0", f"{SIZE}x24"], stdout=subprocess.PIPE,
                              stderr=subprocess.DEVNULL, text=True)  # fmt: skip
    try:
        display = f":{screen.stdout.readline().strip()}"  # told as soon as it is there
        done = folder / "done"
        kept = {name: value for name, value in os.environ.items() if name not in ("PYTHONHOME", "VIRTUAL_ENV")}
        show = subprocess.Popen(
            [str(find_uno_python()), "-c", SHOW, str(find_soffice()), str(folder / "profile"), str(extensions), str(sheet),
             str(done)], stdin=subprocess.PIPE, env={**kept, "DISPLAY": display, "LC_ALL": "C.UTF-8",
                                                     "PYTHONPATH": str(Path(__file__).parents[1] / "tests")},
        )  # fmt: skip
        while not done.exists():
            if show.poll() is not None:
                raise SystemExit("LibreOffice did not open the book in a window")
            time.sleep(0.5)
        subprocess.run(["import", "-display", display, "-window", "root", str(PICTURES / "calc-wizard.png")], check=True)
        show.communicate()
    finally:
        screen.terminate()
        screen.wait()


def main() -> None:
    """Both pictures, from one book."""
    sys.path.insert(0, str(Path(__file__).parents[1]))
    from tests.calc_extension import unpacked
    from tests.office import Office

    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        extensions, sheet = unpacked(folder), book(folder / "what-if.xlsx")
        with Office(extensions) as office, office.open(sheet) as opened:
            opened.recalculate()
            opened.pdf(folder / "sheet.pdf")
        subprocess.run(["pdftoppm", "-r", "110", "-png", "-singlefile", str(folder / "sheet.pdf"),
                        str(PICTURES / "calc-sheet")], check=True)  # fmt: skip
        cut(PICTURES / "calc-sheet.png")
        wizard(folder, extensions, sheet)


if __name__ == "__main__":
    main()

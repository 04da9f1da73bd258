"""The command line as a user meets it: what it writes, what it says, and what it refuses."""

import csv
import subprocess
import sys
from pathlib import Path

import openpyxl
import pytest

from stripcheck.caution import CAUTION
from stripcheck.cli import main

GOOD = "Strip,Name,Runway,Length [m],Surface,Elevation [ft],Slope [%]\nAAA,Invented Flat,09/27,900,grass,1500,1\n"


@pytest.fixture
def strips(tmp_path):
    path = tmp_path / "strips.csv"
    path.write_text(GOOD)
    return path


def fill(list_path, output, *more):
    given = ["--card", "ridge-runner", "--rules", "part-cat-b", "--temp", "20"]
    return main(["fill", str(list_path), "-o", str(output), *given, *more])


def test_fill_writes_a_workbook_and_says_what_it_did(strips, tmp_path, capsys):
    assert fill(strips, tmp_path / "out.xlsx") == 0
    said = capsys.readouterr().out
    assert "1 runway, 0 of 1 left out" in said
    assert "Landing: 1 suitable, 0 marginal, 0 unsuitable, 0 not assessed" in said
    assert CAUTION in said
    sheets = openpyxl.load_workbook(tmp_path / "out.xlsx").sheetnames
    assert sheets == ["Summary", "Strips", "Aircraft", "Manual", "Day", "Rules", "Left out", "Method"]


def test_quiet_says_nothing(strips, tmp_path, capsys):
    assert fill(strips, tmp_path / "out.xlsx", "--quiet") == 0
    assert capsys.readouterr() == ("", "")


def test_fill_writes_a_result_table(strips, tmp_path):
    strips.write_text(GOOD.replace("Slope [%]", "Slope [%],Mine").replace(",1\n", ",1,=1+1\n"))
    assert fill(strips, tmp_path / "out.csv", "--quiet") == 0
    with open(tmp_path / "out.csv", encoding="utf-8-sig", newline="") as file:
        rows = list(csv.DictReader(file))
    assert [row["Direction"] for row in rows] == ["09", "27"]
    assert rows[0]["Take-off verdict"] == "suitable"
    assert float(rows[0]["Take-off margin [m]"]) > 0.0
    assert rows[0]["Mine"] == "'=1+1"  # a spreadsheet program would run it as a formula
    assert rows[0]["Caution"] == CAUTION


def test_an_existing_file_is_kept_unless_forced(strips, tmp_path, capsys):
    output = tmp_path / "out.xlsx"
    output.write_text("mine")
    assert fill(strips, output) == 2
    assert "add --force to replace it" in capsys.readouterr().err
    assert output.read_text() == "mine"
    assert fill(strips, output, "--force") == 0
    assert openpyxl.load_workbook(output).sheetnames[0] == "Summary"


def test_an_old_file_survives_bad_input(strips, tmp_path):
    output = tmp_path / "out.xlsx"
    output.write_text("mine")
    strips.write_text("Strip,Length [bananas]\nAAA,700\n")
    assert fill(strips, output, "--force") == 2
    assert output.read_text() == "mine"


CARD = (Path(__file__).parents[1] / "stripcheck" / "cards" / "ridge-runner.toml").read_text()


@pytest.mark.parametrize(
    ("text", "says"),
    [
        ("", "empty"),
        ("Strip,Colour\nAAA,green\n", "no usable column"),
        ("Strip,Length [bananas],Surface\nAAA,700,grass\n", "bananas"),
        ("Strip,Length [m],Length [ft],Surface\nAAA,700,2300,grass\n", "Length [ft]"),
    ],
    ids=["empty", "no usable column", "unknown unit", "duplicate columns"],
)  # fmt: skip
def test_a_list_that_can_t_be_used_is_refused_in_one_sentence(tmp_path, capsys, text, says):
    path = tmp_path / "strips.csv"
    path.write_text(text)
    assert fill(path, tmp_path / "out.xlsx") == 2
    said = capsys.readouterr().err
    assert said.startswith("stripcheck: ") and said.count("\n") == 1 and "Traceback" not in said
    assert says in said and "strips.csv" in said
    assert not (tmp_path / "out.xlsx").exists()


@pytest.mark.parametrize(
    ("column", "value", "says"),
    [
        ("Length [m]", "long", '"long" is not a number'),
        ("Length [m]", "-700", "-700"),
        ("Length [m]", "80 ft", "80 ft"),
        ("Elevation [ft]", "60000", "60000"),
    ],
    ids=["text where a number belongs", "negative length", "a runway of 80 ft", "an elevation of 60,000 ft"],
)  # fmt: skip
def test_one_bad_row_is_not_assessed_and_fatal_only_when_strict(tmp_path, capsys, column, value, says):
    headers = GOOD.splitlines()[0].split(",")
    cells = GOOD.splitlines()[1].split(",")
    bad = [value if header == column else cell for header, cell in zip(headers, cells, strict=True)]
    path = tmp_path / "strips.csv"
    path.write_text(GOOD + ",".join(["BBB", *bad[1:]]) + "\n")
    assert fill(path, tmp_path / "out.csv", "--quiet") == 0
    with open(tmp_path / "out.csv", encoding="utf-8-sig", newline="") as file:
        rows = list(csv.DictReader(file))
    verdicts = [row["Landing verdict"] for row in rows]
    assert verdicts[2:] == ["not assessed", "not assessed"] and "not assessed" not in verdicts[:2]
    assert says in rows[2]["Landing: limiting reason"]
    assert fill(path, tmp_path / "strict.csv", "--strict") == 2
    said = capsys.readouterr().err
    assert says in said and "row 3" in said and column in said and said.count("\n") == 1
    assert not (tmp_path / "strict.csv").exists()


@pytest.mark.parametrize(
    ("options", "says"),
    [
        (["--qnh", "500"], "neither a pressure in hPa"),
        (["--qnh", "29.92"], ""),
        (["--wind", "270"], "such as 270/10"),
        (["--isa-dev", "10"], "not both"),
        (["--temp-at", "1200 furlongs per fortnight"], "is not a unit of altitude"),
        (["--takeoff-mass", "3000"], "the card allows up to 1,110 kg"),
        (["--takeoff-mass", "heavy"], "is not a number"),
        (["--takeoff-flap", "45"], "there is no flap setting"),
        (["--takeoff-flap", "30"], "not allowed for take-off"),
        (["--card", "no-such-card"], "neither a file nor one of the shipped cards: high-mule, ridge-runner"),
        (["--rules", "nowhere.toml"], "there is no such file"),
        (["-o", "nowhere/out.xlsx"], "the folder does not exist"),
        (["-o", "out.docx"], "must end in .xlsx or .csv"),
        (["--airports", "nowhere.csv"], "nowhere.csv"),
    ],
)  # fmt: skip
def test_options_that_can_t_be_right_are_refused_in_one_sentence(strips, tmp_path, capsys, monkeypatch, options, says):
    monkeypatch.chdir(tmp_path)
    code = fill(strips, "out.xlsx", *options)
    said = capsys.readouterr().err
    assert code == (2 if says else 0), said
    assert says in said and said.count("\n") == (1 if says else 0)
    assert (tmp_path / "out.xlsx").exists() == (not says)


@pytest.mark.parametrize(
    ("change", "says"),
    [
        (("[wing]", "[wings]"), "[wing] is missing"),
        (('area = "16.3 m²"', ""), "area is missing"),
        (('stall_speed = "46 kt"', 'stall_speed = "56 kt"'), "more flap never raises it"),
        (('max_takeoff = "1110 kg"', 'max_takeoff = "-5 kg"'), "can't be right for a mass"),
        (('span = "11.0 m"', 'span = "11.0 m"\nspam = 2'), '"spam" is not an entry here'),
        (('kind = "fixed pitch"', 'kind = "paddle wheel"'), "is none of: fixed pitch, constant speed"),
        (("[aeroplane]", "[aeroplane"), "is not a TOML file"),
    ],
)  # fmt: skip
def test_a_card_that_can_t_be_right_is_refused_in_one_sentence(strips, tmp_path, capsys, change, says):
    card = tmp_path / "card.toml"
    assert change[0] in CARD
    card.write_text(CARD.replace(*change))
    assert main(["fill", str(strips), "-o", str(tmp_path / "o.xlsx"), "--card", str(card), "--rules", "part-cat-b",
                 "--temp", "20"]) == 2  # fmt: skip
    said = capsys.readouterr().err
    assert says in said and "card.toml" in said and said.count("\n") == 1


def test_no_such_list(tmp_path, capsys):
    assert fill(tmp_path / "none.csv", tmp_path / "out.xlsx") == 2
    assert "there is no such file" in capsys.readouterr().err


def test_a_day_without_temperature_is_refused(strips, tmp_path, capsys):
    assert main(["fill", str(strips), "-o", str(tmp_path / "o.xlsx"), "--card", "ridge-runner", "--rules", "part-cat-b"]) == 2
    assert "no temperature: add --temp or --isa-dev" in capsys.readouterr().err


def test_demo_fills_the_invented_scenario_and_says_where(tmp_path, capsys, monkeypatch):
    monkeypatch.chdir(tmp_path)
    assert main(["demo"]) == 0
    assert "stripcheck-demo.xlsx: 33 runways, 3 of 36 left out" in capsys.readouterr().out
    assert (tmp_path / "stripcheck-demo.xlsx").stat().st_size > 50_000


STRIP = ["strip", "--card", "ridge-runner", "--rules", "uk-leaflet", "--length", "700", "--elev", "2300", "--surface", "grass",
         "--slope", "-2.5", "--heading", "262", "--temp", "22"]  # fmt: skip


def test_strip_prints_one_page(capsys):
    assert main([*STRIP, "--wind", "240/8", "--takeoff-mass", "900 kg", "--takeoff-flap", "20", "--obstacle", "30 m/500"]) == 0
    said = capsys.readouterr().out
    assert said.startswith("Strip 26/08: 700 m, grass, dry, elevation 2,300 ft, 2.5 % uphill on 08\n")
    assert "take-off 900 kg, flap 20; landing 1,000 kg, flap 30" in said
    assert "headwind 7 kt on 26, tailwind 7 kt on 08" in " ".join(said.split())
    assert "LAST PLACE TO GO AROUND" in said and CAUTION in " ".join(said.split())
    assert max(map(len, said.splitlines())) <= 100


@pytest.mark.parametrize(
    ("options", "says"),
    [
        (["--length", "700 bananas"], "is not a unit of length"),
        (["--surface", "porridge"], "is not one that stripcheck knows"),
        (["--obstacle", "60"], "a height and a distance such as"),
        (["--takeoff-flap", "30"], "not allowed for take-off"),
        (["--takeoff-mass", "heavy"], "is not a number"),
        (["--wind", "270"], "such as 270/10"),
        (["--isa-dev", "10"], "not both"),
        (["--card", "no-such-card"], "neither a file nor one of the shipped cards"),
        (["--profile", "0:0, 700"], "is not a point of a profile"),
        (["--profile", "0:0, 300:6"], "the profile ends at 300 m but the strip at 700 m"),
    ],
)  # fmt: skip
def test_strip_options_that_can_t_be_right_are_refused_in_one_sentence(capsys, options, says):
    assert main([*STRIP, *options]) == 2
    said = capsys.readouterr()
    assert said.out == "" and said.err.startswith("stripcheck: ") and said.err.count("\n") == 1
    assert says in said.err


def test_strip_needs_a_temperature(capsys):
    assert main(STRIP[:-2]) == 2
    assert capsys.readouterr().err == "stripcheck: no temperature: add --temp or --isa-dev\n"


def test_list_names_what_is_shipped(capsys):
    assert main(["list"]) == 0
    said = capsys.readouterr().out
    assert all(name in said for name in ("high-mule", "ridge-runner", "part-cat-b", "manual-only", CAUTION))


def test_help_starts_without_the_heavy_libraries():
    code = (
        "import sys\nfrom stripcheck.cli import main\n"
        "try:\n    main(['--help'])\nexcept SystemExit:\n    pass\n"
        "loaded = {'numpy', 'openpyxl', 'pint', 'xlwings', 'python_calamine'} & set(sys.modules)\n"
        "sys.exit(f'loaded: {loaded}' if loaded else 0)"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stderr
    assert "COMMAND" in done.stdout and CAUTION.split(".")[0] in " ".join(done.stdout.split())


def test_the_list_itself_is_never_overwritten(strips, tmp_path, capsys):
    (tmp_path / "link.csv").symlink_to(strips)
    for output in (strips, tmp_path / "link.csv"):
        assert fill(strips, output, "--force") == 2
        assert "this is the list itself" in capsys.readouterr().err
        assert strips.read_text() == GOOD


def test_a_length_without_unit_is_taken_in_metres_and_said_so(tmp_path, capsys):
    path = tmp_path / "strips.csv"
    path.write_text(GOOD.replace("Length [m]", "Length"))
    assert fill(path, tmp_path / "out.xlsx") == 0
    assert "Taken for granted: " in capsys.readouterr().out.splitlines()[0]


def test_card_prints_one_page_and_draws(tmp_path, capsys):
    picture = tmp_path / "mule.svg"
    assert main(["card", "high-mule", "--picture", str(picture)]) == 0
    said = capsys.readouterr().out
    assert said.startswith("Aircraft card: High Mule 500 (high-mule.toml)\n")
    assert "THE CARD AGAINST THE MANUAL" in said and CAUTION in " ".join(said.split())
    assert max(map(len, said.splitlines())) <= 100
    drawn = picture.read_bytes()
    assert main(["card", "high-mule", "--picture", str(picture)]) == 2
    why = "this file exists; choose another name, or add --force to replace it"
    assert capsys.readouterr() == ("", f"stripcheck: {picture}: {why}\n")
    assert main(["card", "high-mule", "--picture", str(picture), "--force"]) == 0
    assert picture.read_bytes() == drawn


def test_card_refuses_what_it_can_not_read_or_draw(tmp_path, capsys):
    assert main(["card", "nowhere"]) == 2
    assert capsys.readouterr().err.startswith('stripcheck: "nowhere" is neither a file nor one of the shipped cards')
    assert main(["card", "high-mule", "--picture", str(tmp_path / "mule.gif")]) == 2
    assert "must end in .png or .svg" in capsys.readouterr().err


def test_a_list_of_which_nothing_is_left_is_told(tmp_path, capsys):
    listed = tmp_path / "pads.csv"
    text = "Strip,Runway,Length [m],Elevation [ft],Surface,Closed\nXAAA,09/27,900,2300,grass,yes\n"
    listed.write_text(text, encoding="utf-8")
    for name in ("out.xlsx", "out.csv"):
        assert main(["fill", str(listed), "--card", "ridge-runner", "--rules", "manual-only", "--temp", "20", "-o",
                     str(tmp_path / name)]) == 2  # fmt: skip
        assert "pads.csv: none of its runways can be assessed (1 closed)" in capsys.readouterr().err
        assert not (tmp_path / name).exists()

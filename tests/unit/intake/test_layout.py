import pytest

from effluent.domain.sample import Result
from effluent.errors import FileMissing, ValueRefused
from effluent.intake.layout import FIELDS, PLAIN, Layout, zone

COLUMNS = '[columns]\nsample = "Bottle"\nanalyte = "Name"\nvalue = "Found"\nunit = "Unit"\n'


@pytest.fixture
def read(tmp_path):
    def read(text):
        (tmp_path / "map.toml").write_text(text, encoding="utf-8")
        return Layout.read(tmp_path / "map.toml")

    return read


def test_fields_are_those_of_a_result():
    ours = set(Result.__dataclass_fields__) | {"value", "reissue_of"}
    assert set(FIELDS) <= ours


def test_mapping_file_is_read_whole(read):
    layout = read(
        "decimal = ','\ndelimiter = ';'\nencoding = 'cp1252'\ndate_format = '%d.%m.%Y'\n"
        "time_zone = 'Europe/Lisbon'\nskip_rows = 3\n"
        + COLUMNS
        + "[constants]\nlaboratory = 'Ribeira'\ndilution_factor = 5\n[skip]\nType = ['QC', ' BLK ']\n"
    )
    assert layout == Layout(
        columns={"sample": "Bottle", "analyte": "Name", "value": "Found", "unit": "Unit"},
        constants={"laboratory": "Ribeira", "dilution_factor": "5"},
        skip={"Type": frozenset({"QC", "BLK"})},
        date_format="%d.%m.%Y",
        decimal=",",
        delimiter=";",
        encoding="cp1252",
        time_zone="Europe/Lisbon",
        skip_rows=3,
    )


def test_wide_columns_say_analyte_and_unit(read):
    layout = read(
        "[columns]\nsample = 'Bottle'\n[wide]\n\"Cd  (mg/L)\" = {analyte = 'cadmium', unit = 'mg/L'}\n"
    )
    assert layout.wide == {"Cd (mg/L)": {"analyte": "cadmium", "unit": "mg/L"}}


@pytest.mark.parametrize(
    ("text", "reason"),
    [
        ("colums = 1", "did you mean columns"),
        ("[columns]\nsampel = 'x'", "did you mean sample"),
        ("[constants]\nlaboratry = 'x'", "did you mean laboratory"),
        ("[constants]\nreporting_limit = 0.5", "decimal mark of the file"),
        ("[columns]\nsample = 5", "write a text between quotation marks"),
        ("columns = 'x'", r"write it as a table: \[columns\]"),
        ("[skip]\nType = 'QC'", "list the cells"),
        ("[wide]\nCd = 'cadmium'", r"write it as a table: \[Cd\]"),
        ("[wide]\nCd = {analite = 'cadmium'}", "did you mean analyte"),
        ("date_format = 'yyyy-mm-dd'", "day, month and year"),
        ("date_format = '%H:%M'", "day, month and year"),
        ("date_format = '%d.%m.%Y %'", "as in %d"),
        ("date_format = '%Y-%d-%m'", "day, month and year"),
        ("decimal = ';'", "a point or a comma"),
        ("delimiter = ':'", "one of four marks"),
        ("time_zone = 'Lisbon'", "IANA name such as Europe/Lisbon"),
        ("skip_rows = -1", "0 to 1000"),
        ("skip_rows = true", "0 to 1000"),
        ("not toml", "it is not TOML"),
        pytest.param("skip_rows = " + "9" * 5_000, "it is not TOML", id="long number"),
        pytest.param("columns = " + "[" * 100_000, "it is not TOML", id="deep nesting"),
        ("", "each of sample, analyte, value and unit needs a line"),
        ("[columns]\nsample = 'S'\n[wide]\nCd = {analyte = 'cadmium'}", "'unit' is not accepted"),
        (COLUMNS + "[wide]\nUnit = {analyte = 'cadmium', unit = 'mg/L'}", "keep one"),
    ],
)
def test_what_a_mapping_file_cannot_say_is_refused(read, text, reason):
    with pytest.raises(ValueRefused, match=reason):
        read(text)


def test_file_that_is_not_text_is_refused(tmp_path):
    (tmp_path / "map.toml").write_bytes(b"\xff\x00")
    with pytest.raises(ValueRefused, match="it is not TOML"):
        Layout.read(tmp_path / "map.toml")


def test_missing_mapping_file_is_named(tmp_path):
    for name in ("map.toml", "x" * 300):
        with pytest.raises(FileMissing, match="mapping file of this laboratory"):
            Layout.read(tmp_path / name)


def test_plain_layout_takes_the_headings_that_are_there():
    bound = PLAIN.bind(["sample", "", "analyte", "value", "unit"], "results.csv")
    assert bound.columns == {name: name for name in ("sample", "analyte", "value", "unit")}


def test_plain_layout_refuses_a_misspelled_heading():
    with pytest.raises(ValueRefused, match="did you mean reporting_limit"):
        PLAIN.bind(["sample", "analyte", "value", "unit", "reporting_limt"], "results.csv")


def test_plain_layout_names_missing_columns():
    with pytest.raises(ValueRefused, match="it has no column analyte, unit"):
        PLAIN.bind(["sample", "value"], "results.csv")


def test_column_that_is_not_in_the_file_is_refused_with_the_near_heading(read):
    with pytest.raises(ValueRefused, match=r"f\.csv has no such heading; near headings are Bottles"):
        read(COLUMNS).bind(["Bottles", "Name", "Found", "Unit"], "f.csv")


def test_column_unlike_any_heading_is_refused_with_all_of_them(read):
    with pytest.raises(ValueRefused, match="it has Name, Found"):
        read(COLUMNS).bind(["Name", "Found"], "f.csv")


@pytest.mark.parametrize("name", ["", "Nowhere/City", "../etc/passwd", "x" * 300, "a\0b"])
def test_time_zone_that_is_none_is_refused(name):
    with pytest.raises(ValueRefused, match="IANA"):
        zone(name)

"""Writes the corpus: small tables as instruments, loggers and spreadsheets write them, each with its expected reading.

Usage: python tests/tables/corpus/make.py

The expected readings are written down here by hand, never taken from the reader. `expected.json` holds them.
"""

import gzip
import json
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

HERE = Path(__file__).parent
P = [1.5, 2.25, -3.0, 40.0, 2.5]
Q = [7.0, 0.125, 12.0, 7.5, 9.0]
CHANNELS: dict[str, list[float | None]] = {"p": [*P], "q": [*Q]}


@dataclass(frozen=True)
class Case:
    """One file and what it must be read as; what is None is not looked at."""

    content: str | bytes
    channels: dict[str, list[float | None]] = field(default_factory=lambda: CHANNELS)
    units: dict[str, str] = field(default_factory=dict)
    dialect: str | None = None
    aside: tuple[str, ...] = ()
    censored: dict[str, tuple[int, int]] = field(default_factory=dict)
    remark: str = ""
    proposals: tuple[tuple[str, int, int], ...] = ()
    plan: dict[str, Any] = field(default_factory=dict)


def rows(separator: str = ",", comma: bool = False, end: str = "\n") -> str:
    """The five rows of p and q."""
    lines = [f"{p}{separator}{q}" for p, q in zip(P, Q, strict=True)]
    return end.join(line.replace(".", "," if comma else ".") for line in lines) + end


TEXT = "p,q\n" + rows()
GERMAN = "p;q\n" + rows(";", comma=True)

CASES = {
    # separators
    "comma.csv": Case(TEXT, dialect="comma"),
    "semicolon.csv": Case("p;q\n" + rows(";"), dialect="semicolon"),
    "tab.txt": Case("p\tq\n" + rows("\t"), dialect="tab"),
    "bar.txt": Case("p|q\n" + rows("|"), dialect="bar"),
    "one_blank.dat": Case("p q\n" + rows(" "), dialect="blanks"),
    "aligned_blanks.dat": Case("   p      q\n" + "".join(f"{p:8} {q:9}\n" for p, q in zip(P, Q, strict=True))),
    "blanks_and_quotes.dat": Case('"p in" q\n' + rows("  "), {"p in": [*P], "q": [*Q]}),
    "separator_told.csv": Case("sep=;\np;q\n" + rows(";"), dialect="semicolon, names in line 2"),
    "separator_told_quoted.csv": Case('"sep=|"\np,x|q\n' + rows("|"), {"p,x": [*P], "q": [*Q]}),
    "tabs_as_said.txt": Case("a,b\tq\n" + rows("\t"), {"a,b": [*P], "q": [*Q]}, plan={"separator": "tab"}),
    "stamps_and_words.csv": Case(
        "TimeStamp;p;state;q;state\n"
        + "".join(
            f"01.05.2024 10:00:0{k}.123;{row.replace(';', ';GOOD;')};{'BAD' if k == 3 else 'GOOD'}\n"
            for k, row in enumerate(rows(";", comma=True).split())
        ),
        dialect="semicolon, decimal comma",
        aside=("TimeStamp", "state", "state (2)"),
    ),
    # decimals and thousands
    "thousands_and_signs.csv": Case(
        "p;q\n−1 234.5;+1\n−12 000.0;+3\n−1 234 567.0;+2\n", {"p": [-1234.5, -12000, -1234567], "q": [1, 3, 2]}
    ),
    "full_width.csv": Case(
        "p;q\n１．５;７\n２．２５;０．１２５\n－３;１２\n４０;７．５\n２．５;９\n",
        remark="'１．５' in p, q: an unusual form",
    ),
    "decimal_comma.csv": Case(GERMAN, dialect="semicolon, decimal comma"),
    "decimal_comma_tab.txt": Case("p\tq\n" + rows("\t", comma=True), dialect="tab, decimal comma"),
    "decimal_comma_quoted.csv": Case('p,q\n"1,5","7,0"\n"2,25","0,125"\n"-3","12"\n"40","7,5"\n"2,5","9"\n'),
    "decimal_comma_one_column.csv": Case("p\n1,5\n2,25\n-3,0\n40,0\n2,5\n", {"p": [*P]}),
    "thousands_comma.csv": Case(
        'p,q\n"1,234.5",1\n"12,000",3\n"1,234,567",2\n', {"p": [1234.5, 12000, 1234567], "q": [1, 3, 2]}
    ),
    "thousands_point.csv": Case(
        "p;q\n1.234,5;1\n12.000;3\n1.234.567;2\n", {"p": [1234.5, 12000, 1234567], "q": [1, 3, 2]}
    ),
    "thousands_blank.csv": Case("p;q\n1 234,5;1\n12 000;3\n0,5;2\n", {"p": [1234.5, 12000, 0.5], "q": [1, 3, 2]}),
    "thousands_apostrophe.csv": Case("p,q\n1'234.5,1\n12'000,3\n0.5,2\n", {"p": [1234.5, 12000, 0.5], "q": [1, 3, 2]}),
    "comma_in_doubt.csv": Case(
        "p;q\n1,234;1\n2,345;3\n3,000;2\n",
        {"p": [1.234, 2.345, 3.0], "q": [1, 3, 2]},
        remark="--decimal=. reads it the other way",
    ),
    "point_in_doubt.csv": Case(
        "p;q\n1.234;1\n2.345;3\n3.000;2\n",
        {"p": [1.234, 2.345, 3.0], "q": [1, 3, 2]},
        remark="--decimal=, reads it the other way",
    ),
    "comma_as_said.csv": Case(
        "p;q\n1,234;1\n2,345;3\n3,000;2\n", {"p": [1234, 2345, 3000], "q": [1, 3, 2]}, plan={"decimal": "."}
    ),
    # encodings and line ends
    "utf8_mark.csv": Case("\ufeffp,q\n" + rows()),
    "utf16.txt": Case(("p\tq\n" + rows("\t")).encode("utf-16"), dialect="tab, UTF-16"),
    "utf16_no_mark.txt": Case(("p\tq\n" + rows("\t")).encode("utf-16-le")),
    "utf16_big.csv": Case(b"\xfe\xff" + TEXT.encode("utf-16-be")),
    "windows_1252.csv": Case(
        ("µ [°C],q\n" + rows()).encode("cp1252"), {"µ [°C]": [*P], "q": [*Q]}, units={"µ [°C]": "°C"}
    ),
    "latin_1_as_said.csv": Case(
        ("µ,q\n" + rows()).encode("latin-1"), {"µ": [*P], "q": [*Q]}, plan={"encoding": "latin-1"}
    ),
    "carriage_returns.csv": Case("p,q\r" + rows(end="\r")),
    "mixed_ends.csv": Case("p,q\r\n1.5,7\r2.25,0.125\n-3,12\r\n40,7.5\n2.5,9\r"),
    "no_last_end.csv": Case(TEXT.rstrip("\n")),
    "gzip.csv.gz": Case(gzip.compress(GERMAN.encode(), mtime=0), dialect="semicolon, decimal comma"),
    # what stands above the readings
    "preamble.csv": Case(
        "Rig 7\nOperator;M. Weber\n\ntime;p;q\ns;bar;\n"
        + "".join(f"{k * k};{r}" + "\n" for k, r in enumerate(rows(";").split())),
        {"p": [*P], "q": [*Q]},
        units={"p": "bar", "q": ""},
        dialect="semicolon, 2 preamble lines, names in line 4, units in line 5",
        aside=("time",),
    ),
    "padded_title.csv": Case(
        "Rig 7;;\np;q;when\nbar;l;\n" + "".join(f"{row};2024-03-0{k}\n" for k, row in enumerate(rows(";").split(), 1)),
        units={"p": "bar", "q": "l"},
        dialect="semicolon, 1 preamble line, names in line 2, units in line 3",
        aside=("when",),
    ),
    "quotes_in_preamble.csv": Case('"Rig 7, "left" side\nvalve 5" open\np,q\n' + rows()),
    "units_and_dashes.csv": Case(
        "n,p,q\n-,bar,°C\n" + "".join(f"{k}.5,{row}\n" for k, row in zip((3, 1, 4, 1, 5), rows().split(), strict=True)),
        {"n": [3.5, 1.5, 4.5, 1.5, 5.5], **CHANNELS},
        units={"n": "", "p": "bar", "q": "°C"},
        dialect="comma, units in line 2",
    ),
    "dashes_are_no_units.csv": Case(
        "p,q\n-,OPEN\n" + rows(), {"p": [None, *P], "q": [None, *Q]}, remark="1 cell holds 'OPEN' in q"
    ),
    "limits_far_off.csv": Case(
        "p,q\n" + "".join(f"{'<0.001' if k % 3 == 0 else 20 + k / 8},{k * k % 11}.5\n" for k in range(12)),
        {"p": [0.001 if k % 3 == 0 else 20 + k / 8 for k in range(12)], "q": [k * k % 11 + 0.5 for k in range(12)]},
        censored={"p": (4, 0)},
    ),
    "units_in_brackets.csv": Case("p,q\n[bar],[l/min]\n" + rows(), units={"p": "bar", "q": "l/min"}),
    "no_units_as_said.csv": Case(
        "p,q\nup,down\n" + rows(), {"p": [None, *P], "q": [None, *Q]}, plan={"units_line": 0, "header_line": 1}
    ),
    "names_units_kinds.dat": Case(
        '"LOG5","rig","7","3.1","a"\n"when","p","q"\n"TS","bar","l"\n"","Avg","Smp"\n'
        + "".join(f'"2024-03-0{k}",{row}\n' for k, row in enumerate(rows().split(), 1)),
        units={"p": "bar", "q": "l"},
        aside=("when",),
    ),
    "comments.csv": Case(
        "# made by rig 7\n# in May\np,q\n" + rows(),
        dialect="comma, 2 preamble lines, names in line 3, comments begin with #",
    ),
    "names_in_comment.dat": Case("# rig 7\n# p q\n" + rows(" ")),
    "comment_within.csv": Case(
        "p,q\n1.5,7\n2.25,0.125\n# restarted\n-3,12\n40,7.5\n2.5,9\n", remark="1 comment line was left out"
    ),
    "comments_as_said.csv": Case(
        "; rig, 7\np,q\n1.5,7\n; stop, go\n2.25,0.125\n-3,12\n40,7.5\n2.5,9\n", plan={"comment": ";", "separator": ","}
    ),
    "names_as_said.csv": Case("a,b\np,q\n" + rows(), plan={"header_line": 2}),
    "no_names.csv": Case(rows(), {"column 1": [*P], "column 2": [*Q]}, dialect="comma, no header"),
    "no_names_dates.csv": Case(
        "".join(f"2024-03-0{k} 12:00,{row}\n" for k, row in enumerate(rows().split(), 1)),
        {"column 2": [*P], "column 3": [*Q]},
        aside=("column 1",),
    ),
    "no_names_as_said.csv": Case(
        "5,p\n" + rows(), {"column 1": [5, *P], "column 2": [None, *Q]}, plan={"header_line": 0}
    ),
    "wavelengths.csv": Case(
        "sample,400,410\na,1.5,7\nb,2.25,0.125\nc,-3,12\n",
        {"400": [1.5, 2.25, -3], "410": [7, 0.125, 12]},
        aside=("sample",),
    ),
    "two_line_name.csv": Case('"p\n(left)",q\n' + rows(), {"p (left)": [*P], "q": [*Q]}),
    "equal_names.csv": Case(
        "p,p,\n" + "".join(f"{r},{k * k}\n" for k, r in enumerate(rows().split())),
        {"p": [*P], "p (2)": [*Q], "column 3": [0, 1, 4, 9, 16]},
    ),
    # rows
    "trailing_separators.csv": Case("p,q,\n" + rows().replace("\n", ",\n"), aside=("column 3",)),
    "blank_lines.csv": Case("\n\np,q\n\n" + rows().replace("\n", "\n\n")),
    "ragged.csv": Case("p,q\n1.5,7\n2.25\n-3,12,5\n40,7.5\n2.5,9\n", {"p": [*P], "q": [7, None, 12, 7.5, 9]}),
    "footer.csv": Case(TEXT + "\nEnd of record\nchecked by MW\n", dialect="comma, 2 footer lines"),
    "last_cell_never_written.txt": Case(
        "p\tq\tnotes\n" + rows("\t", comma=True), dialect="tab, decimal comma", aside=("notes",)
    ),
    "sums_below_in_german.csv": Case(
        "Zeit;p;q;\ns;bar;N;\n"
        + "".join(f"{k**2},5;{row};\n" for k, row in enumerate(rows(";", comma=True).split()))
        + "\nMittelwert;8,65;7,125;\nSumme:;43,25;35,625;\nEnde der Messung\n",
        {"Zeit": [0.5, 1.5, 4.5, 9.5, 16.5], **CHANNELS},
        units={"p": "bar"},
        dialect="semicolon, decimal comma, units in line 2, 1 footer line",
        aside=("column 4",),
        remark="2 last rows ('Mittelwert', 'Summe:') sum up the others",
    ),
    "empty_column_beside_words.csv": Case(
        "p,q,r\n1.5,7,\nOVER,0.125,\n-3,12,\n40,7.5,\n2.5,9,\n",
        {"p": [1.5, None, -3.0, 40.0, 2.5], "q": [*Q]},
        aside=("r",),
    ),
    "sums_below.csv": Case(
        "sample,p,q\n"
        + "".join(f"s{k},{row}\n" for k, row in enumerate(rows().split()))
        + "Mean,8.65,7.125\nMax,40,12\n",
        aside=("sample",),
        remark="2 last rows ('Mean', 'Max') sum up the others",
    ),
    "zero_bytes_at_end.csv": Case(TEXT.encode() + bytes(700)),
    "zero_bytes_within.csv": Case(TEXT.replace("40.0", "4\x000").encode()),
    # cells
    "words.csv": Case(
        "p,q\n1.5,OVER\nBAD,0.125\n-3,OVER\nTIMEOUT,7.5\n2.5,9\n",
        {"p": [1.5, None, -3, None, 2.5], "q": [None, 0.125, None, 7.5, 9]},
        remark="2 cells hold 'OVER' in q",
    ),
    "words_first.csv": Case("p,q\nOPEN,OPEN\n" + rows(), {"p": [None, *P], "q": [None, *Q]}),
    "forms.csv": Case(
        "p,q\n1.5E+0,１２\n+2.25e0,.125\n−3,1.#QNAN\n4.0D+01,7.5\n250%,1.#INF\n",
        {"p": [1.5, 2.25, -3, 40, None], "q": [12, 0.125, None, 7.5, float("inf")]},
        remark="250%",
    ),
    "percent_and_units.csv": Case(
        "p,q\n1.5 mV,7%\n2.25 mV,0.125 %\n-3mV,12 %\n40 mV,n/a\n2.5 mV,9 %\n",
        {"p": [*P], "q": [7, 0.125, 12, None, 9]},
        units={"p": "mV", "q": "%"},
    ),
    "mixed_units.csv": Case(
        "p,q\n1.5 mV,7\n2.25 V,0.125\n-3,12\n40,7.5\n2.5,9\n",
        {"p": [None, None, -3, 40, 2.5], "q": [*Q]},
        remark="'2.25 V'",
    ),
    "limits.csv": Case("p,q\n<1.5,7\n2.25,0.125\n-3,> 12\n40,≥7.5\n<=2.5,9\n", censored={"p": (2, 0), "q": (0, 2)}),
    "missing.csv": Case(
        "p,q\n1.5,-\n,0.125\nNA,12\n40,nan\n2.5,#N/A\n",
        {"p": [1.5, None, None, 40, 2.5], "q": [None, 0.125, 12, None, None]},
    ),
    "codes.csv": Case(
        "p,q\n1.5,9.9e37\n2.25,0.125\n-9999,9.9E+37\n-9999,7.5\n2.5,9\n2,8\n",
        {"p": [1.5, 2.25, -9999, -9999, 2.5, 2], "q": [9.9e37, 0.125, 9.9e37, 7.5, 9, 8]},
        proposals=(("-9999", 1, 2), ("9.9e+37", 1, 2)),
    ),
    "codes_as_said.csv": Case(
        "p,q\n1.5,9.9e37\n2.25,0.125\n-9999,9.9E+37\n-9999,7.5\n2.5,9\n2,8\n",
        {"p": [1.5, 2.25, None, None, 2.5, 2], "q": [None, 0.125, None, 7.5, 9, 8]},
        plan={"missing": ["-9999", "9.9e37"]},
    ),
    # columns
    "not_channels.csv": Case(
        "row,when,ok,id,mode,p,q\n"
        + "".join(
            f"{k},{1_700_000_000 + k * k},{k % 2},{(k * 37) % 101},{k % 3},{k**1.5!r},{(k * k) % 11}.5\n"
            for k in range(60)
        ),
        {"p": [k**1.5 for k in range(60)], "q": [(k * k) % 11 + 0.5 for k in range(60)]},
        aside=("row", "when", "ok", "id", "mode"),
    ),
}


def main() -> None:
    """Write every file and what it must be read as."""
    expected = {}
    for name, case in CASES.items():
        content = case.content if isinstance(case.content, bytes) else case.content.encode()
        (HERE / name).write_bytes(content)
        expected[name] = {key: value for key, value in vars(case).items() if key != "content"}
    (HERE / "expected.json").write_text(json.dumps(expected, indent=1, ensure_ascii=False) + "\n", encoding="utf-8")


if __name__ == "__main__":
    main()

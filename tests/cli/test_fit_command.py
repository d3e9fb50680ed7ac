"""`chooser fit monostable` as a person and a program meet it."""

from __future__ import annotations

import json
import math
import os
import pty
import re
import subprocess
import sys
from pathlib import Path

import pytest
from typer.testing import CliRunner

from chooser.cli.app import app
from chooser.search.terms import Rule

SAMPLE = str(Path(__file__).parents[2] / "sample_inventory")
HEAD = "kind,value,count,drawer,tolerance,technology,voltage,measured\n"


def fit(*words: str):
    return CliRunner().invoke(app, ["fit", "monostable", *words], env={"NO_COLOR": "1"})


def answered(*words: str) -> dict:
    done = fit(*words, "--json")
    assert done.exit_code in {0, 3}, done.stderr
    return json.loads(done.stdout)


@pytest.fixture
def sheet(tmp_path):
    """Write a stock sheet of the rows given."""

    def write(*rows: str) -> str:
        path = tmp_path / "stock.csv"
        path.write_text(HEAD + "\n".join(rows) + "\n", encoding="utf-8")
        return str(path)

    return write


class TestTheTable:
    def test_it_says_what_to_pick_from_where_and_what_to_expect(self, sheet):
        stock = sheet(
            "resistor,820k,3,A4,1%,metal-film,,",
            "capacitor,100u,2,F2,20%,electrolytic,25V,",
        )
        done = fit("90s", "--stock", stock, "--timer", "ideal", "--within", "2%")
        assert done.exit_code == 0
        lines = done.stdout.splitlines()
        # 820k x 100u x ln 3 = 90.0862 s; corners 0.99 x 0.8 and 1.01 x 1.2 of it.
        assert lines[0] == "One-shot of 90 s within 2% (88.2 s to 91.8 s), ideal timer at 9 V."
        assert lines[3].split()[:4] == ["1", "90.09", "s", "+0.10%"]
        assert "71.3 s to 109 s" in lines[3]
        assert lines[4].strip() == "R = 820k   from A4: 820k 1% metal-film"
        assert lines[5].strip() == "C = 100u   from F2: 100u 20% 25 V electrolytic"

    def test_the_caution_that_matters_most_stands_below_with_its_letter(self):
        done = fit("90s", "--stock", SAMPLE, "--rank", "error")
        rows = [line for line in done.stdout.splitlines() if "of 100" in line]
        assert len(rows) == 10
        letters = {word for row in rows for word in row.split()[-2:] if word.isalpha()}
        assert letters
        for letter in letters:
            assert any(line.startswith(f"{letter}  ") for line in done.stdout.splitlines())
        assert "(fit 1): " in done.stdout

    def test_it_says_what_was_searched_and_left_out(self):
        done = fit("90s", "--stock", SAMPLE, "--rank", "count")
        assert "exact: no circuit of the space is better placed" in done.stdout
        assert "class-2-ceramic: 7 capacitor holdings of ceramic left out" in done.stdout

    def test_an_order_that_weighs_the_nearest_does_not_claim_more(self):
        out = fit("90s", "--stock", SAMPLE).stdout
        assert "possible circuits the nearest were weighed in " in out
        assert "Searched" not in out
        assert re.search(r"^Of [\d,]+ possible circuits", out, re.MULTILINE)
        wide = CliRunner().invoke(
            app, ["fit", "astable", "--frequency", "440Hz", "--stock", SAMPLE]
        )
        assert re.search(r"^Of 1\.4e18 possible circuits", wide.stdout, re.MULTILINE)

    def test_many_boards_are_named_where_the_stock_cannot_make_them_all(self, sheet):
        stock = sheet("resistor,820k,3,A4,1%,metal-film,,", "capacitor,100u,2,F2,20%,tantalum,25V,")
        done = fit("90s", "--stock", stock, "--timer", "ideal", "--boards", "20")
        assert "Nothing in this stock makes such an interval for all 20 boards." in done.stdout
        assert "The stock is enough for 2 boards" in done.stdout

    def test_reasons_on_request(self):
        assert "before the next:" not in fit("90s", "--stock", SAMPLE).stdout
        assert fit("90s", "--stock", SAMPLE, "--why").stdout.count("before the next:") == 9

    def test_talk_of_danger_defers_to_local_codes_and_qualified_people(self):
        out = fit("90s", "--stock", SAMPLE).stdout
        assert "qualified person under your local codes" in out


class TestJson:
    def test_the_contract(self, sheet):
        stock = sheet(
            "resistor,820k,3,A4,1%,metal-film,,",
            "capacitor,100u,2,F2,20%,electrolytic,25V,",
        )
        answer = answered("90s", "--stock", stock, "--timer", "ideal", "--rank", "error")
        assert answer["schema"] == 1
        assert answer["circuit"] == "monostable"
        assert answer["targets"] == {"interval": 90.0}
        assert (answer["timer"], answer["device"]) == ("ideal", "ideal timer")
        assert answer["supply"] == 9.0
        assert answer["searched"]["complete"] is True
        # One resistor holding of 3: 1 + 2 + 4 networks; one polarised capacitor of 2, never in
        # series: 1 + 1 networks.
        assert answer["searched"]["combinations"] == 7 * 2
        best = answer["fits"][0]
        assert set(best["outputs"]) == {"interval"}
        out = best["outputs"]["interval"]
        assert out["target"] == 90.0
        assert out["error"] == pytest.approx(out["nominal"] / 90.0 - 1.0)
        assert out["spread"] == best["spread"]
        assert out["nominal"] == pytest.approx(820e3 * 100e-6 * math.log(3), rel=1e-12)
        assert out["low"] == pytest.approx(out["nominal"] * 0.99 * 0.8, rel=1e-9)
        assert out["high"] == pytest.approx(out["nominal"] * 1.01 * 1.2, rel=1e-9)
        assert best["spread"] == pytest.approx(math.hypot(0.01, 0.2) / math.sqrt(3), rel=1e-9)
        assert best["slots"]["R"] == {
            "network": "820k",
            "value": 820e3,
            "picks": [{"holding": 1, "drawer": "A4", "count": 1}],
        }

    def test_picks_are_for_all_boards(self):
        answer = answered("0.5s", "--stock", SAMPLE, "--boards", "3", "--rank", "count")
        picks = answer["fits"][0]["slots"]["R"]["picks"]
        assert [pick["count"] for pick in picks] == [3]

    def test_high_is_null_where_it_may_never_end(self):
        answer = answered("300s", "--stock", SAMPLE, "--rank", "count", "--top", "40")
        endless = [f for f in answer["fits"] if f["outputs"]["interval"]["high"] is None]
        assert endless
        for each in endless:
            assert "may-never-end" in [caution["code"] for caution in each["cautions"]]

    @pytest.mark.parametrize("rank", ["balanced", "error", "count"])
    def test_the_same_input_gives_the_same_output(self, rank):
        one, two = (answered("7.3s", "--stock", SAMPLE, "--rank", rank) for _ in range(2))
        one["searched"].pop("seconds")
        two["searched"].pop("seconds")
        assert json.dumps(one) == json.dumps(two)


class TestStatuses:
    def test_an_answer_outside_the_band_is_three_and_names_a_purchase(self, sheet):
        stock = sheet("resistor,1k,3,A4,1%,metal-film,,", "capacitor,1u,2,F2,5%,polyester,63V,")
        done = fit("1s", "--stock", stock, "--timer", "TLC555")
        assert done.exit_code == 3
        assert "come nearest" in done.stdout
        assert "910k" in done.stdout  # 1 s / (1 uF ln 3) = 910.24 k, E24

    @pytest.mark.parametrize(
        ("rows", "says"),
        [
            (("resistor,1k,3,A4,,,,",), "no capacitors"),
            (("capacitor,1u,3,A4,,polyester,,",), "no resistors"),
            (("resistor,1k,0,A4,,,,", "capacitor,1u,3,A4,,polyester,,"), "No resistor is free"),
            (("resistor,1k,3,A4,,,,", "capacitor,1u,3,A4,,x7r,,"), "keep out every capacitor"),
        ],
    )
    def test_a_stock_that_cannot_gets_a_sentence_and_the_next_step(self, tmp_path, rows, says):
        path = tmp_path / "stock.csv"
        path.write_text(HEAD + "".join(row + "\n" for row in rows), encoding="utf-8")
        done = fit("1s", "--stock", str(path))
        assert done.exit_code == 3
        assert says in done.stdout

    def test_an_empty_database_says_how_to_fill_it(self, tmp_path):
        db = str(tmp_path / "stock.db")
        assert CliRunner().invoke(app, ["db", "upgrade", "--db", db]).exit_code == 0
        done = fit("1s", "--db", db)
        assert done.exit_code == 3
        assert "The stock is empty; load a sheet with `chooser stock load FILE`." in done.stdout

    def test_an_empty_sheet_is_refused(self, tmp_path):
        path = tmp_path / "stock.csv"
        path.write_text(HEAD, encoding="utf-8")
        done = fit("1s", "--stock", str(path))
        assert done.exit_code == 2
        assert "no rows" in done.stderr

    def test_a_missing_database_says_how_to_get_one(self, tmp_path):
        done = fit("1s", "--db", str(tmp_path / "none.db"))
        assert done.exit_code == 2
        assert "stock load" in done.stderr
        assert done.stdout == ""

    @pytest.mark.parametrize(
        ("words", "says"),
        [
            (["90"], "90s"),
            (["5m"], "min"),
            (["5s..60s"], "range"),
            (["0s"], "zero"),
            (["90s", "--supply", "24V"], "24 V"),
            (["1s", "--timer", "bipolar", "--supply", "1V"], "supply"),
            (["1s", "--timer", "cmos", "--supply", "40V"], "supply"),
            (["1s", "--timer", "ideal", "--supply", "0V"], "no voltage"),
            (["90s", "--supply", "much"], "much"),
            (["90s", "--within", "2"], "2%"),
            (["90s", "--timer", "NE5555"], "NE555"),
            (["90s", "--most-resistors", "5"], "many-parts"),
            (["90s", "--rank", "best"], "balanced"),
            (["90s", "--stock", "nowhere"], "does not exist"),
        ],
    )
    def test_wrong_words_are_two_and_one_plain_sentence(self, words, says):
        stock = [] if "--stock" in words else ["--stock", SAMPLE]
        done = fit(*words, *stock)
        assert done.exit_code == 2
        assert says in done.stderr
        assert done.stdout == ""
        assert "Traceback" not in done.stderr

    @pytest.mark.parametrize("rule", list(Rule))
    def test_every_rule_can_be_lifted(self, rule):
        assert fit("90s", "--stock", SAMPLE, "--allow", str(rule), "--top", "2").exit_code == 0


class TestTerminals:
    def read_from_terminal(self, columns: int, *words: str) -> str:
        """Run the program on a pseudo-terminal of so many columns and return what it wrote."""
        main, end = pty.openpty()
        process = subprocess.Popen(
            [sys.executable, "-m", "chooser", "fit", "monostable", *words],
            stdout=end,
            env=os.environ | {"COLUMNS": str(columns), "TERM": "xterm"},
        )
        os.close(end)
        pieces = []
        while True:
            try:
                piece = os.read(main, 1 << 16)
            except OSError:  # Linux says so when the other end is closed
                break
            if not piece:
                break
            pieces.append(piece)
        os.close(main)
        assert process.wait() == 0
        return b"".join(pieces).decode()

    @pytest.mark.parametrize("columns", [34, 60, 80, 140])
    def test_no_line_is_wider_than_the_terminal_and_nothing_is_cut(self, columns):
        out = self.read_from_terminal(columns, "90s", "--stock", SAMPLE, "--top", "4")
        lines = out.replace("\r\n", "\n").splitlines()
        assert max(map(len, lines)) <= columns
        assert "\x1b" not in out
        assert "…" not in out
        assert out.count("C = ") == 4
        if columns == 60:
            assert out.startswith("One-shot of 90 s within 2%")
            assert "1. interval " in out

    def test_a_pipe_gets_whole_lines(self):
        done = subprocess.run(
            [sys.executable, "-m", "chooser", "fit", "monostable", "90s", "--stock", SAMPLE],
            env=os.environ | {"COLUMNS": "40"},
            capture_output=True,
            text=True,
            check=True,
        )
        assert max(map(len, done.stdout.splitlines())) > 100
        assert done.stderr == ""

    def test_a_reader_that_leaves_is_no_fault(self):
        command = f"{sys.executable} -m chooser fit monostable 90s --stock {SAMPLE} | head -n 1"
        done = subprocess.run(
            ["bash", "-c", f"set -o pipefail; {command}"],  # noqa: S607
            capture_output=True,
            text=True,
            check=False,
        )
        assert done.returncode in {0, 141}
        assert done.stderr == ""

    def test_an_old_code_page_is_no_fault(self):
        done = subprocess.run(
            [sys.executable, "-m", "chooser", "fit", "monostable", "90s", "--stock", SAMPLE],
            env=os.environ | {"PYTHONIOENCODING": "ascii"},
            capture_output=True,
            text=True,
            check=True,
        )
        assert "One-shot of 90 s" in done.stdout


def test_the_way_to_an_answer_imports_nothing_heavy(tmp_path):
    """No pandas, openpyxl, alembic or scipy on the path of `fit` with a database."""
    db = str(tmp_path / "stock.db")
    run = [sys.executable, "-m", "chooser"]
    subprocess.run([*run, "stock", "load", SAMPLE, "--db", db], check=True, capture_output=True)
    script = (
        "import sys; from typer.testing import CliRunner; from chooser.cli.app import app; "
        f"r = CliRunner().invoke(app, ['fit', 'monostable', '90s', '--db', {db!r}]); "
        "assert r.exit_code == 0, r.output; "
        "print([m for m in ('pandas', 'openpyxl', 'alembic', 'scipy') if m in sys.modules])"
    )
    done = subprocess.run(
        [sys.executable, "-c", script], capture_output=True, text=True, check=True
    )
    assert done.stdout.strip() == "[]"

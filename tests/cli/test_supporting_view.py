"""`chooser fit ... --with-parts` as a person and a program meet it."""

from __future__ import annotations

import json
from pathlib import Path

import pytest
from typer.testing import CliRunner

from chooser.cli.app import app

SAMPLE = str(Path(__file__).parents[2] / "sample_inventory")
HEAD = "kind,value,count,drawer,tolerance,technology,voltage,power\n"
TIMING = ("resistor,820k,9,A4,1%,metal-film,,", "capacitor,100u,9,F2,20%,electrolytic,25V,")
OTHERS = (
    "capacitor,100n,50,C2,10%,x7r,50V,",
    "capacitor,10n,50,C2,10%,x7r,50V,",
    "capacitor,47u,20,E2,20%,electrolytic,16V,",
    "resistor,10k,50,A3,5%,carbon-film,,1/4W",
)
IDEAL = ("--timer", "ideal")


def fit(*words: str):
    return CliRunner().invoke(app, ["fit", *words], env={"NO_COLOR": "1"})


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


class TestThePage:
    def test_below_the_table_stands_what_goes_with_the_first_fit(self, sheet):
        stock = sheet(*TIMING, *OTHERS)
        done = fit("monostable", "90s", "--stock", stock, *IDEAL, "--with-parts", "--top", "1")
        assert done.exit_code == 0
        lines = done.stdout.splitlines()
        at = lines.index("With fit 1:")
        assert lines[at - 2].strip().startswith("C = 100u")
        rows = [line.split("  ") for line in lines[at + 1 : at + 6]]
        words = [[cell.strip() for cell in row if cell.strip()] for row in rows]
        assert words[0] == ["for", "part", "drawer", "why"]
        assert [row[:3] for row in words[1:]] == [
            ["supply bypass", "100n 10% 50 V x7r capacitor", "C2"],
            ["supply reservoir", "47u 20% 16 V electrolytic capacitor", "E2"],
            ["control bypass", "10n 10% 50 V x7r capacitor", "C2"],
            ["trigger pull-up", "10k 5% carbon-film resistor", "A3"],
        ]
        assert lines[at + 6].startswith("The 47u in drawer E2 is polarised")

    def test_nothing_of_it_unless_asked(self, sheet):
        done = fit("monostable", "90s", "--stock", sheet(*TIMING, *OTHERS), *IDEAL)
        assert "With fit 1" not in done.stdout
        assert "supporting" not in answered("monostable", "90s", "--stock", SAMPLE, "--top", "1")

    def test_what_the_stock_lacks_is_named_and_told_to_the_shell(self, sheet):
        words = ("monostable", "90s", "--stock", sheet(*TIMING, *OTHERS[2:3]), *IDEAL)
        assert fit(*words).exit_code == 0
        done = fit(*words, "--with-parts")
        assert done.exit_code == 3
        out = done.stdout
        assert "No supply bypass in stock: 47n to 220n, ceramic or film, rated 9 V or more." in out
        assert "No control bypass in stock: 4n7 to 100n, ceramic or film, rated 9 V or more." in out
        assert "No trigger pull-up in stock: 4k7 to 22k." in out

    def test_an_led_says_what_it_will_get(self):
        done = fit("monostable", "90s", "--stock", SAMPLE, "--timer", "NE555", "--led", "2V 10mA")
        # 9 V less 1.2 V and 2 V, over 560 and 8 ohm: 10.21 mA.
        assert "lit while the output is high: 10 mA at 2 V; 10.2 mA with this one" in done.stdout
        assert "supply bypass" in done.stdout

    def test_a_short_interval_has_its_trigger_coupled(self):
        short = ("monostable", "20ms", "--stock", SAMPLE, "--with-parts")
        assert "trigger coupling" in fit(*short).stdout
        assert "trigger coupling" not in fit(*short, "--trigger-held", "1ms").stdout

    def test_narrow_terminals_get_it_too(self):
        from chooser.cli.supporting_view import supporting_lines  # as no terminal is at hand
        from chooser.parts import Count, Holding, Kind, Part
        from chooser.supporting.needs import Need
        from chooser.supporting.picking import Picked, Supporting

        need = Need("pull-up", Kind.RESISTOR, 4.7e3, 10e3, 22e3, "why")
        lines = supporting_lines(Supporting((), (need,)), 24)
        assert all(len(line) <= 24 for line in lines)
        assert " ".join(lines).strip() == "With fit 1: No pull-up in stock: 4k7 to 22k."
        part = Part(Kind.RESISTOR, 10e3, "10k", technology="carbon-film", power=0.25)
        pick = Picked(need, Holding(1, part, "A3", Count(5)), 1)
        lines = supporting_lines(Supporting((pick,), ()), 30)
        assert all(len(line) <= 30 for line in lines)
        assert {"carbon-film", "resistor", "A3", "why"} <= set(" ".join(lines).split())


class TestJson:
    def test_the_contract(self, sheet):
        stock = sheet(*TIMING, *OTHERS, "resistor,680,9,A2,5%,carbon-film,,1/4W")
        words = ("--boards", "3", "--led", "2V 10mA", "--top", "1")
        found = answered("monostable", "90s", "--stock", stock, *IDEAL, *words)["supporting"]
        assert found["fit"] == 1
        assert found["missing"] == []
        assert [pick["use"] for pick in found["picks"]] == [
            "supply bypass",
            "supply reservoir",
            "control bypass",
            "trigger pull-up",
            "LED resistor",
        ]
        assert {pick["count"] for pick in found["picks"]} == {3}
        led = found["picks"][-1]
        assert (led["value"], led["holding"], led["drawer"]) == (680.0, 7, "A2")
        # (9 V - 2 V) / 680 ohm.
        assert led["current"] == pytest.approx(10.294e-3, rel=1e-4)
        assert any("polarised" in text for text in found["cautions"])

    def test_what_is_missing(self, sheet):
        stock = sheet(*TIMING, *OTHERS[:3])
        found = answered("monostable", "90s", "--stock", stock, *IDEAL, "--with-parts")
        assert found["supporting"]["missing"] == [
            {
                "use": "trigger pull-up",
                "low": 4700.0,
                "high": 22000.0,
                "text": "No trigger pull-up in stock: 4k7 to 22k.",
            }
        ]

    def test_pieces_that_the_fit_needs_are_not_given_away(self, sheet):
        # Two 10k make the interval, and the third is for the trigger; on two boards it is short.
        rows = ("capacitor,100n,50,C2,1%,polyester,63V,", *OTHERS[1:3])
        stock = sheet(*rows, "resistor,10k,3,A3,1%,metal-film,,")
        words = ("monostable", "2.197ms", "--stock", stock, *IDEAL, "--trigger-held", "1us")
        found = answered(*words, "--with-parts", "--top", "1")
        assert found["fits"][0]["slots"]["R"]["picks"][0]["count"] == 2
        assert found["supporting"]["picks"][-1]["use"] == "trigger pull-up"
        stock = sheet(*rows, "resistor,10k,5,A3,1%,metal-film,,")
        words = (*words[:3], stock, *words[4:])
        short = answered(*words, "--with-parts", "--top", "1", "--boards", "2")
        assert short["fits"][0]["slots"]["R"]["picks"][0]["count"] == 4
        assert [need["use"] for need in short["supporting"]["missing"]] == ["trigger pull-up"]

    def test_without_a_fit_there_is_nothing_to_go_with(self, sheet):
        stock = sheet(*OTHERS[3:])
        found = answered("monostable", "90s", "--stock", stock, *IDEAL, "--with-parts")
        assert found["fits"] == []
        assert "supporting" not in found


class TestWords:
    @pytest.mark.parametrize("text", ["2V 10mA", "10mA 2V", "2 V 10 mA", "2V, 10mA", "2,0V 0.01A"])
    def test_an_led_in_any_order(self, text, sheet):
        stock = sheet(*TIMING, *OTHERS, "resistor,680,9,A2,5%,carbon-film,,1/4W")
        found = answered("monostable", "90s", "--stock", stock, *IDEAL, "--led", text)
        assert found["supporting"]["picks"][-1]["value"] == 680.0

    @pytest.mark.parametrize("text", ["", "2V", "10mA", "red", "2V 10", "2V 10mA 3mA", "x " * 9999])
    def test_no_led(self, text):
        done = fit("monostable", "90s", "--stock", SAMPLE, "--led", text)
        assert done.exit_code == 2
        assert "write those of the LED, such as '2V 10mA'." in done.stderr
        assert len(done.stderr) < 200

    @pytest.mark.parametrize(
        ("words", "said"),
        [
            (("--led", "2V 300mA"), "can source 200 mA"),
            (("--led", "2V 10mA", "--led-to", "plus"), "write ground or supply"),
            (("--led-to", "supply"), "add --led '2V 10mA'"),
        ],
    )
    def test_what_cannot_be_is_refused_before_anything_is_read(self, words, said):
        done = fit("monostable", "90s", "--stock", "/no/such/sheet.csv", *words)
        assert done.exit_code == 2
        assert said in done.stderr

    def test_lit_in_the_low_time(self):
        words = ("--led", "2V 10mA", "--led-to", "supply", "--timer", "NE555")
        found = answered("monostable", "90s", "--stock", SAMPLE, *words)["supporting"]["picks"][-1]
        # (9 V - 2 V - 0.1 V) / 10 mA - 12 ohm = 678 ohm.
        assert found["value"] == 680.0

    @pytest.mark.parametrize("family", ["delay", "resistance", "capacitance"])
    def test_what_has_no_device_has_no_such_option(self, family):
        done = fit(family, "1", "--with-parts")
        assert done.exit_code == 2
        assert "--with-parts" in done.stderr

    @pytest.mark.parametrize(
        "words",
        [
            ("astable", "--frequency", "1kHz", "--duty", "50..60%"),
            ("steered", "--on", "0.2s", "--off", "1.8s"),
            ("output-fed", "--frequency", "1kHz", "--timer", "cmos"),
            ("schmitt", "--frequency", "1kHz"),
            ("logic-monostable", "5ms"),
            ("counter", "1h"),
        ],
        ids=lambda words: words[0],
    )
    def test_every_family_with_a_device_has_it(self, words):
        found = answered(*words, "--stock", SAMPLE, "--top", "1", "--with-parts")["supporting"]
        assert found["missing"] == []
        assert found["picks"][0]["use"] == "supply bypass"

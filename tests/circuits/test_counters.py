"""The table of oscillator + counter chips against published examples, and ratios without a pin."""

import pytest
from hypothesis import given
from hypothesis import strategies as st

from chooser.circuits.counters import (
    COUNTERS,
    Counter,
    check_counter_supply,
    check_ratio,
    counter_named,
    counter_names,
)
from chooser.errors import BadRequestError, UnknownNameError

RIPPLE = ("HEF4060B", "MC14060B", "74HC4060", "CD4060B")
TIMERS = ("HEF4541B", "MC14541B")
BUILT_IN = (*RIPPLE, *TIMERS)


def test_the_known_counters():
    assert counter_names() == BUILT_IN


@pytest.mark.parametrize("name", BUILT_IN)
def test_every_figure_has_a_source(name):
    counter = counter_named(name)
    sources = dict(counter.sources)
    assert set(sources) == set(COUNTERS.keys) - {"number"}
    assert all(len(source) > 3 for source in sources.values())
    assert all(output.source for output in counter.outputs)


@pytest.mark.parametrize("name", BUILT_IN)
def test_figures_are_in_si_units_and_believable(name):
    counter = counter_named(name)
    assert 2.0 <= counter.supply_min < counter.supply_max <= 18.0
    assert 0.0 < counter.rule_minus < 0.25
    assert 0.0 < counter.rule_plus < 0.25
    assert 1e3 <= counter.smallest_resistor < counter.largest_resistor <= 1e6
    assert 10e-12 < counter.smallest_capacitor <= 1e-9
    assert 1.0 < counter.series_least < counter.series_most <= 10.0
    least = counter.period_factor * counter.smallest_resistor * counter.smallest_capacitor
    assert 10e3 < counter.highest_frequency <= 1.05 / least


@pytest.mark.parametrize(
    ("name", "factor"),
    [
        ("HEF4060B", 2.3),  # electronics forum, thread 643227
        ("MC14060B", 2.3),  # the same
        ("74HC4060", 2.5),  # 74HC/HCT4060 of Dec 1990, p. 11
        ("CD4060B", 2.2),  # the maker's support forum, thread 969400
        ("HEF4541B", 2.3),  # from memory
        ("MC14541B", 2.3),  # from memory
    ],
)
def test_factors(name, factor):
    assert counter_named(name).period_factor == factor


@pytest.mark.parametrize(
    "example",
    [  # type, R, C, ratio, printed, its digits as a relative tolerance, source
        ("HEF4060B", 28.9e3, 470e-9, 1, 1 / 32.009, 2e-5, "electronics forum, thread 643227"),
        ("HEF4060B", 10e3, 10e-6, 1, 1 / 4.34, 2e-3, "thread 22365, truncated"),
        ("HEF4060B", 10e3, 10e-6, 16, 3.68, 1e-9, "thread 22365"),
        ("HEF4060B", 204e3, 10e-6, 64, 300.288, 1e-9, "thread 22365"),
        ("HEF4060B", 470e3, 0.22e-6, 1, 1 / 4.20, 2e-3, "forum thread 272882, as calculated there"),
        ("HEF4060B", 470e3, 0.22e-6, 16, 1 / 0.26, 2e-2, "the same"),
        ("CD4060B", 50e3, 200e-12, 1, 1 / 45.5e3, 2e-3, "thread 969400, by the rule"),
        ("74HC4060", 28.9e3, 470e-9, 1, 1 / 29.4486, 1e-5, "worked out apart"),
    ],
)
def test_worked_examples(example):
    name, r, c, ratio, printed, digits, source = example
    counter = counter_named(name)
    period = counter.period_factor * r * c * (check_ratio(counter, ratio).ratio if ratio > 1 else 1)
    assert period == pytest.approx(printed, rel=digits), source


@pytest.mark.parametrize("name", ["HEF4060B", "MC14060B", "CD4060B"])
@pytest.mark.parametrize(
    "measured",
    [
        1 / (38.7e3 * 10e3 * 1e-9),  # hobby build log 293: 10k, 1 nF, 38.7 kHz
        1 / (16 * 0.323 * 470e3 * 0.22e-6),  # hobby forum thread 272882: 470k, 0.22 uF
    ],
)
def test_pieces_that_somebody_measured_lie_within_the_limits(name, measured):
    counter = counter_named(name)
    share = measured / counter.period_factor - 1.0
    assert -counter.rule_minus <= share <= counter.rule_plus


def test_where_the_makers_own_table_is_off_its_rule_the_capacitor_is_too_small():
    # The maker's support forum, thread 969400: 23 kHz with 50k and 200 pF, where the rule has 45.5.
    counter = counter_named("CD4060B")
    assert 1 / (counter.period_factor * 50e3 * 200e-12) > 1.9 * 23e3
    assert counter.smallest_capacitor > 200e-12


@pytest.mark.parametrize("name", RIPPLE)
def test_the_pins_of_a_4060(name):
    # 74HC4060 Rev. 03 section 1 and MC14060B p. 1: the ratios; the pins mostly from memory.
    outputs = counter_named(name).outputs
    assert [output.ratio for output in outputs] == [
        16, 32, 64, 128, 256, 512, 1024, 4096, 8192, 16384,
    ]  # fmt: skip
    assert {output.name: output.pin for output in outputs} == {
        "Q4": 7, "Q5": 5, "Q6": 4, "Q7": 6, "Q8": 14, "Q9": 13, "Q10": 15,
        "Q12": 1, "Q13": 2, "Q14": 3,
    }  # fmt: skip
    assert all(output.name == f"Q{output.stages}" for output in outputs)


@pytest.mark.parametrize(("name", "printed"), [("HEF4060B", "O13"), ("74HC4060", "Q13")])
def test_sheets_that_count_from_zero(name, printed):
    # 74HC4060 Rev. 03 section 1: Q3 to Q9 and Q11 to Q13, so its Q13 divides by 16384.
    last = counter_named(name).outputs[-1]
    assert (last.name, last.printed, last.ratio) == ("Q14", printed, 16384)


@pytest.mark.parametrize("name", TIMERS)
def test_the_ratios_of_a_4541(name):
    # From memory.
    assert [output.ratio for output in counter_named(name).outputs] == [2**8, 2**10, 2**13, 2**16]


@pytest.mark.parametrize("name", BUILT_IN)
def test_a_divider_of_n_stages_first_rises_at_half_its_period(name):
    for output in counter_named(name).outputs:
        bits, clocks = 0, 0
        while not bits >> (output.stages - 1) & 1:  # a ripple counter, clock by clock
            bits, clocks = bits + 1, clocks + 1
        assert output.first_rise == clocks
        assert output.ratio == 2 * clocks


@pytest.mark.parametrize(
    ("ratio", "said"),
    [
        (2048, "2048 has no pin on a CD4060B; next are 1024 (Q10) and 4096 (Q12)."),
        (8, "8 has no pin on a CD4060B; next is 16 (Q4)."),
        (2**15, "32768 has no pin on a CD4060B; next is 16384 (Q14)."),
        (100, "100 has no pin on a CD4060B; next are 64 (Q6) and 128 (Q7)."),
    ],
)
def test_a_ratio_without_a_pin_is_refused_with_the_next_ones(ratio, said):
    with pytest.raises(BadRequestError) as refused:
        check_ratio(counter_named("CD4060B"), ratio)
    assert str(refused.value).endswith(said)


@pytest.mark.parametrize(("typed", "choices"), [("4060", RIPPLE), ("4541", TIMERS)])
def test_a_bare_number_is_refused_with_the_makers(typed, choices):
    with pytest.raises(UnknownNameError) as refused:
        counter_named(typed)
    assert str(refused.value).endswith(f"name one of {', '.join(choices)}.")


@pytest.mark.parametrize("typed", ["74hc4060", "74HC4060"])
def test_names_in_any_case(typed):
    assert counter_named(typed).name == "74HC4060"


@pytest.mark.parametrize(("name", "supply"), [("74HC4060", 9.0), ("CD4060B", 2.0)])
def test_a_supply_out_of_range_is_refused(name, supply):
    with pytest.raises(BadRequestError, match=f"The counter {name} does not work at"):
        check_counter_supply(counter_named(name), supply)


def test_a_users_calibrated_piece(tmp_path):
    file = tmp_path / "own.toml"
    own = '[ours]\nlike = "CD4060B"\nperiod_factor = 2.17\nrule_minus = 0.01\nrule_plus = 0.01\n'
    file.write_text(own, encoding="utf-8")
    assert counter_named("ours", file).period_factor == 2.17
    assert counter_named("ours", file).outputs == counter_named("CD4060B").outputs


@pytest.mark.parametrize(
    ("outputs", "said"),
    [
        ('[{ name = "Q4" }]', "row 1: stages is missing"),
        ('[{ name = "Q4", stages = 4.5 }]', "row 1, stages: 4.5 cannot be; it must be a whole"),
        ('[{ name = "Q4", stages = 1e300 }]', "1e+300 stages are more than 32"),
        ("[{ stages = 4 }]", "give each output a name of its own"),
        ('[{ name = "Q", stages = 4 }, { name = "Q", stages = 5 }]', "a name of its own"),
        ('[{ name = "Q5", stages = 5 }, { name = "Q4", stages = 4 }]', "the stages are 5, 4"),
    ],
)
def test_bad_outputs_are_refused_with_file_and_key(tmp_path, outputs, said):
    file = tmp_path / "own.toml"
    file.write_text(f'[x]\nlike = "CD4060B"\noutputs = {outputs}\n', encoding="utf-8")
    with pytest.raises(BadRequestError, match=r"own\.toml \[x\], key outputs") as refused:
        counter_named("x", file)
    assert said in str(refused.value)


@given(st.text(max_size=200))
def test_any_text_is_read_or_refused(text):
    try:
        read = COUNTERS.read(text, "own.toml", {})
    except BadRequestError as refused:
        assert "own.toml" in str(refused)  # noqa: PT017 - either way is right
    else:
        assert all(isinstance(counter, Counter) for counter in read.values())

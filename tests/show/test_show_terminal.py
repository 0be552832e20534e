"""The closing table: at most eight numbers, every check that does not hold, 80 columns."""

import io

import pytest
import synthetic_flows as synthetic

from fem_flow.show.terminal import closing_table
from fem_flow.show.words import first_look, in_si, shown, spoken, spoken_of, wanted_flows


def printed(result, width=80):
    from rich.console import Console

    out = io.StringIO()
    closing_table(result, Console(file=out, width=width, no_color=True))
    return out.getvalue()


def test_the_table_answers_without_opening_a_file(result):
    text = printed(result)
    assert [line.split() for line in text.splitlines()[2:4]] == [
        ["Total", "pressure", "drop", "inlet", "→", "outlet", "21.830", "0.095", "kPa", "holds"],
        ["Loss", "coefficient", "inlet", "→", "outlet", "14.560", "0.070", "holds"],
    ]
    assert "caution: Laminar (throat): Re = 840 on twice the gap (0.85 mm), below 2000; the" in text
    assert "Converged" not in text
    assert text.rstrip().endswith("unless stated.")


@pytest.mark.parametrize("width", [80, 60, 200])
def test_no_line_is_wider_than_the_terminal(result, width):
    result["title"] = "A long title " * 12
    assert max(len(line) for line in printed(result, width).splitlines()) <= width


def test_a_check_that_breaks_comes_first_and_forbids_use(result):
    result["checks"].append(synthetic.BREAKS)
    text = printed(result)
    assert text.index("breaks: Laminar (inlet): Re = 5300") < text.index("caution: Laminar")
    assert "NOT FOR USE as design values while a check breaks." in text


def test_user_text_is_not_markup(result):
    result["title"] = "[red]valve[/red]"
    result["checks"][1]["says"] = "[bold]x[/bold]"
    assert "[red]valve[/red]" in printed(result)
    assert "[bold]x[/bold]" in printed(result)


def test_withheld_peaks_say_why(result):
    result["numbers"] = [n for n in result["numbers"] if n["quantity"] == "wall_shear_max" and n["value"] is None]
    text = " ".join(printed(result).split())
    assert "Wall shear, largest of seat is withheld: a sharp re-entrant corner at x = 12.4 mm" in text


def test_at_most_eight_numbers_the_known_peak_before_the_withheld_one(result):
    chosen = first_look(result)
    assert len(chosen) == 8
    peaks = [n["of"] for n in chosen if n["quantity"] == "wall_shear_max"]
    assert peaks == [["poppet"]]


def test_figures_that_the_case_names_lead(result):
    last = next(n for n in reversed(result["numbers"]) if n["of"])
    assert first_look(result)[0] != last
    result["case"] = {"accuracy": {"of": [" ".join((last["quantity"], *last["of"]))]}}
    assert first_look(result)[0] == last


def test_a_force_that_its_bar_swallows_is_no_answer(result):
    result["numbers"] = [number(1e-12, "N", 3e-12, "force_x", ["poppet"]), number(2.0, "N", 0.1, "force_y", ["poppet"])]
    assert [n["quantity"] for n in first_look(result)] == ["force_y"]


def test_flows_are_an_answer_where_pressures_were_given():
    flow, pressure = {"flow_in": "1 L/min"}, {"static_pressure": "0 bar"}
    assert wanted_flows({"ports": {"a": flow, "b": pressure}}) == ()
    assert wanted_flows({"ports": {"a": pressure, "b": pressure}}) == ("a",)
    assert wanted_flows({"ports": {"a": flow, "b": pressure, "c": pressure}}) == ("b", "c")
    assert wanted_flows({"ports": {"a": flow, "b": pressure, "c": {"closed": True}}}) == ()


def number(value, unit, bar=None, quantity="area", of=()):
    return {"quantity": quantity, "of": list(of), "value": value, "unit": unit, "error_bar": bar}


@pytest.mark.parametrize(
    ("row", "text", "si"),
    [
        (number(21830.0, "Pa", 95.0), ("21.830", "0.095", "kPa"), "21830 Pa"),
        (number(2e-4, "m^3/s"), ("12.00", "", "L/min"), "0.0002 m³/s"),
        (number(-0.5, "N", 0.01), ("−500", "10", "mN"), "−0.5 N"),
        (number(14.56, "1", 0.07), ("14.560", "0.070", ""), ""),
        (number(1.0915e8, "Pa*s/m^3", 4.7e5), ("1.0915", "0.0047", "×10⁸ Pa·s/m³"), ""),
        (number(None, "Pa"), ("withheld", "", ""), ""),
        (number(float("nan"), "Pa"), ("withheld", "", ""), ""),
        (number(0.0, "Pa", 0.0), ("0", "0", "Pa"), ""),
        (number(-7.1e-11, "N", 1.2e-9), ("−0.0001", "0.0012", "µN"), "−7.1e-11 N"),
        (number(2.0, "1", 3.6e-15), ("2.00000", "4e-15", ""), ""),
        (number(9.996, "1", 0.0), ("9.996", "0", ""), ""),
        (number(412.0, "Pa", 8.0), ("412.0", "8.0", "Pa"), ""),
    ],
)
def test_values_in_friendly_units(row, text, si):
    assert shown(row) == text
    assert in_si(row) == si


def test_names_in_words():
    assert spoken("total_pressure_drop") == "Total pressure drop"
    assert spoken_of(number(1.0, "1", quantity="total_pressure_drop", of=("inlet", "outlet"))) == "inlet → outlet"
    assert spoken_of(number(1.0, "m", quantity="attachment_point", of=("floor", "2"))) == "floor, piece 2"

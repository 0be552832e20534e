"""The closing table of ``run`` on the terminal: a few numbers with bars, and every check that does not hold."""

from __future__ import annotations

from fem_flow.show.words import first_look, scope_of, shown, spoken, spoken_of, withheld

MARKS = {"holds": ("green", "holds"), "caution": ("yellow", "caution"), "breaks": ("bold red", "breaks")}


def closing_table(result: dict, console) -> None:
    """Print at most eight numbers of a result (the content of result.json) and each check that is not ``holds``.

    Parameters
    ----------
    result : the content of result.json
    console : a ``rich.console.Console``; the table fits 80 columns
    """
    from rich.padding import Padding
    from rich.table import Table
    from rich.text import Text

    table = Table(
        title=Text(result.get("title") or "Result", style="bold"),
        title_justify="left",
        box=None,
        pad_edge=False,
        padding=(0, 2, 0, 0),
    )
    table.add_column("", overflow="fold")
    table.add_column("of", overflow="fold", style="dim")
    table.add_column("value", justify="right", no_wrap=True)
    table.add_column("±", justify="right", no_wrap=True)
    table.add_column("", no_wrap=True)
    table.add_column("", no_wrap=True)
    notes = []
    for number in first_look(result):
        value, bar, unit = shown(number)
        style, word = MARKS[number["verdict"]]
        table.add_row(spoken(number["quantity"]), spoken_of(number), value, bar, unit, Text(word, style=style))
        if withheld(number) and number.get("note"):
            notes.append((f"{spoken(number['quantity'])} of {spoken_of(number)} is withheld", number["note"]))
    console.print(table, highlight=False)
    for what, why in notes:
        console.print(Padding(Text.assemble((f"{what}: ", "dim"), why), (0, 0, 0, 2)), highlight=False)
    failing = [c for c in result["checks"] if c["verdict"] != "holds"]
    failing.sort(key=lambda c: c["verdict"] != "breaks")
    if failing:
        console.print()
    for check in failing:
        style, word = MARKS[check["verdict"]]
        of = f" ({', '.join(check['of'])})" if check["of"] else ""
        console.print(
            Text.assemble((f"{word}: ", style), (f"{spoken(check['check'])}{of}: ", "bold"), check["says"]), highlight=False
        )
    if any(c["verdict"] == "breaks" for c in failing):
        console.print(Text("NOT FOR USE as design values while a check breaks.", style="bold red"))
    console.print(Text(scope_of(result), style="dim"), highlight=False)

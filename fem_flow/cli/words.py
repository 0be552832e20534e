"""What the commands print for a person, on stdout."""

from __future__ import annotations

import textwrap
from collections.abc import Iterable


def console():
    """A console on stdout that prints names and numbers as they are."""
    from rich.console import Console

    return Console(highlight=False, markup=False)


def table(columns: dict[str, str], rows: Iterable[tuple], title: str | None = None) -> None:
    """Print a plain table; `columns` maps each heading to ``"left"`` or ``"right"``."""
    from rich.table import Table

    drawn = Table(title=title, title_justify="left", title_style="bold", box=None, pad_edge=False, padding=(0, 2, 0, 0))
    for heading, side in columns.items():
        drawn.add_column(heading, justify=side, overflow="fold")
    for row in rows:
        drawn.add_row(*row)
    console().print(drawn)


def show_part_list(rows: list[dict]) -> None:
    """The shipped parts."""
    table({"part": "left", "": "left"}, ((row["name"], row["says"]) for row in rows))


def show_part(facts: dict) -> None:
    """One part: sketch, parameters, ports, sections and walls."""
    print(f"{facts['name']}: {facts['says']} ({facts['kind']})\n")
    if facts["sketch"]:
        print(facts["sketch"] + "\n")
    table(
        {"parameter": "left", "default": "right", "limits": "left", "": "left"},
        ((p["name"], _word(p["default"]), _limits(p), p["says"]) for p in facts["parameters"]),
    )
    print()
    for what in ("ports", "sections", "walls"):
        print(f"{what + ':':<10}{', '.join(facts[what]) or 'none'}")


def show_preview(preview: dict, folder) -> None:
    """Areas and Reynolds numbers of the ports and sections, and the names of the walls."""
    columns = {"": "left", "area": "right", "hydraulic diameter": "right", "flow rate": "right", "Reynolds number": "right"}
    table(columns, (_port(row) for row in preview["ports"]), preview["title"])
    print(f"\nwalls:        {', '.join(preview['walls']) or 'none'}")
    print(f"narrowest gap {_quantity(preview['narrowest_gap'], 'm')}")
    print(f"\ndrawing: {folder / 'preview.png'}")


def show_result(result: dict, folder) -> None:
    """The closing table of a run, and where the rest is."""
    from fem_flow.show.terminal import closing_table

    closing_table(result, console())
    print(f"\nreport: {folder / 'report.html'}")


def show_checks(rows: list[dict]) -> None:
    """Computed and published values side by side; the sources below, numbered."""
    sources = list(dict.fromkeys(row["source"] for row in rows))
    columns = {"check": "left", "quantity": "left", "computed": "right", "published": "right", "difference": "right"}
    columns |= {"allowed": "right", "source": "left", "": "left"}
    before = [None, *(row["name"] for row in rows)]
    table(columns, (_check(row, name, sources.index(row["source"]) + 1) for row, name in zip(rows, before)))
    print("\nPublished values:")
    for number, source in enumerate(sources, 1):
        print(textwrap.fill(source, 78, initial_indent=f"[{number}] ", subsequent_indent="    "))
    failed = sum(not row["passed"] for row in rows)
    print(f"\n{len(rows)} comparisons, {failed} failed" if failed else f"\n{len(rows)} comparisons, all passed")


def _check(row: dict, before: str | None, source: int) -> tuple:
    return (
        "" if row["name"] == before else row["name"], row["quantity"], f"{row['computed']:.6g}", f"{row['published']:.6g}",
        _share(row, row["difference"], "+"), _share(row, row["tolerance"]), f"[{source}]", "" if row["passed"] else "FAILED",
    )  # fmt: skip


def _share(row: dict, value: float, sign: str = "") -> str:
    return f"{value:{sign}.2g}" if row["absolute"] else f"{100 * value:{sign}.2g} %"


def _port(row: dict) -> tuple:
    flow, reynolds = row["flow_rate"], row["reynolds_number"]
    return (
        row["name"], _quantity(row["area"], "m^2"), _quantity(row["hydraulic_diameter"], "m"),
        "not given" if flow is None else _quantity(flow, "m^3/s"), "not given" if reynolds is None else f"{reynolds:.4g}",
    )  # fmt: skip


def _quantity(value: float, unit: str) -> str:
    from fem_flow.units import friendly

    return " ".join(friendly(value, unit))


def _word(value) -> str:
    return str(value).lower() if isinstance(value, bool) else str(value)


def _limits(parameter: dict) -> str:
    low, high = parameter["low"], parameter["high"]
    if parameter["choices"] is not None:
        return " or ".join(parameter["choices"])
    if isinstance(parameter["default"], bool):
        return "true or false"
    if low is not None and high is not None:
        return f"{low} to {high}"
    return f"from {low}" if low is not None else f"up to {high}" if high is not None else ""

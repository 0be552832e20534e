"""The commands of ``fem-flow``, one short function each; what they need is loaded when they are called."""

from __future__ import annotations

import json
import sys
from pathlib import Path
from typing import Annotated

import typer

from fem_flow import __version__
from fem_flow.cli import words
from fem_flow.cli.guard import DONE, FAILED, INACCURATE, Answer
from fem_flow.cli.progress import progress
from fem_flow.errors import CaseError

app = typer.Typer(
    no_args_is_help=True, add_completion=False, rich_markup_mode=None, pretty_exceptions_enable=False,
    context_settings={"help_option_names": ["-h", "--help"], "max_content_width": 100},
    epilog="Exit codes: 0 done; 1 a check of verify failed, or a fault of the program's own; 2 the input is wrong; 3 no steady "
    "solution was found; 4 done, but a requested accuracy was not reached; 130 interrupted.",
)  # fmt: skip

CaseFile = Annotated[Path, typer.Argument(metavar="CASE", help="The case file (.toml).", show_default=False)]
Folder = Annotated[
    Path | None,
    typer.Option(
        "-o", "--output", metavar="DIR", help="Where to write; by default the case file's name without .toml, beside it."
    ),
]
AsJson = Annotated[bool, typer.Option("--json", help="Print one JSON document on stdout, and nothing else there.")]


@app.callback()
def options(version: Annotated[bool, typer.Option("--version", help="Print the version and exit.")] = False):
    """Steady laminar flow in parametric passages: numbers with units, error bars and verdicts.

    Example: fem-flow draft poppet_valve -o poppet.toml, then fem-flow run poppet.toml
    """
    if version:
        print(f"fem-flow {__version__}")
        raise typer.Exit


@app.command()
def parts(
    name: Annotated[
        str | None, typer.Argument(metavar="PART", help="A shipped part, or a script (.py).", show_default=False)
    ] = None,
    as_json: AsJson = False,
) -> Answer:
    """List the shipped parts, or tell all of one.

    Of one part: its sketch, parameters with limits, ports, sections and walls.

    Example: fem-flow parts poppet_valve
    """
    from fem_flow.cli.facts import part_facts, part_list

    data = part_list() if name is None else part_facts(name)
    return Answer(data, lambda: (words.show_part_list if name is None else words.show_part)(data))


@app.command()
def draft(
    part: Annotated[str, typer.Argument(metavar="PART", help="A shipped part, or a script (.py).", show_default=False)],
    output: Annotated[
        Path | None, typer.Option("-o", "--output", metavar="FILE", help="The case file to write; without it, it is printed.")
    ] = None,
    as_json: AsJson = False,
) -> Answer:
    """Write a case file for a part, ready to run.

    Complete and commented: every parameter of the part is in it with its default.

    Example: fem-flow draft poppet_valve -o poppet.toml
    """
    from fem_flow.cli.facts import draft_text, new_file

    text = draft_text(part, Path.cwd() if output is None else output.parent)
    if output is not None:
        new_file(output, text)
    data = {"part": part, "file": None if output is None else str(output), "text": text}
    return Answer(data, lambda: print(text if output is None else f"case file: {output}", end="" if output is None else "\n"))


@app.command()
def preview(case: CaseFile, output: Folder = None, as_json: AsJson = False) -> Answer:
    """Draw a case and solve nothing.

    The part is drawn with its ports, walls and dimensions named; Reynolds numbers and areas are told.

    Example: fem-flow preview poppet.toml
    """
    return _written(case, output, "preview", "preview.json", words.show_preview)


@app.command()
def run(case: CaseFile, output: Folder = None, as_json: AsJson = False) -> Answer:
    """Mesh, solve, measure, picture, report.

    Refines until the accuracy asked for is met; ends with the most important numbers and every check that does not hold.

    Example: fem-flow run poppet.toml -o results/poppet
    """
    return _written(case, output, "run", "result.json", words.show_result)


@app.command()
def verify(
    names: Annotated[list[str] | None, typer.Argument(metavar="NAME", help="Only these checks.", show_default=False)] = None,
    as_json: AsJson = False,
) -> Answer:
    """Compare with published values.

    Prints computed, published, difference and source of every check.

    Example: fem-flow verify cylinder
    """
    from fem_flow.verify.run import run_checks

    with progress() as say:
        rows = [row.to_dict() for row in run_checks(tuple(names or ()), say)]
    return Answer(rows, lambda: words.show_checks(rows), DONE if all(row["passed"] for row in rows) else FAILED)


def _written(path: Path, output: Path | None, job: str, mark: str, show) -> Answer:
    """Run one of the jobs on a case file and hand back what it wrote."""
    from fem_flow.case.model import Case
    from fem_flow.show.folder import check_folder, default_folder

    case = Case.read(path)
    folder = output or default_folder(path)
    check_folder(folder)
    with progress() as say:
        say("starting", None)
        from fem_flow import job as jobs  # after the case was found right: it loads what computing needs

        done = jobs.run(case, say) if job == "run" else jobs.preview(case)
        say("writing", None)
        done.write(folder)
    met = getattr(done, "accuracy_met", True)
    if not met:
        print("The accuracy asked for was not reached; the results were written all the same.", file=sys.stderr)
    data = json.loads((folder / mark).read_text(encoding="utf-8"))
    return Answer(data, lambda: show(data, folder), DONE if met else INACCURATE)


def _not_built(name: str) -> None:
    """A command that is known, but not part of this version: refused, and not listed."""

    @app.command(name, hidden=True, context_settings={"ignore_unknown_options": True, "allow_extra_args": True})
    def refuse(context: typer.Context) -> Answer:
        sentence = (
            f"{name} is known but not built in this version of fem-flow; commands are: parts, draft, preview, run, verify"
        )
        raise CaseError(sentence, reason="not_built", details={"command": name})

    refuse.__doc__ = None


for _name in ("curve", "series", "improve", "compare"):
    _not_built(_name)

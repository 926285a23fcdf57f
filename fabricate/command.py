"""The command line: parse, one call into the library, an exit code.

Exit codes: 0 done, 1 a proof has failed, 2 refused. Results go to standard output, messages to standard error. What is
not needed to answer ``--help`` is imported by the command that needs it.
"""

from __future__ import annotations

import io
import json
import os
import sys
from collections.abc import Iterator
from contextlib import contextmanager, suppress
from pathlib import Path
from typing import TYPE_CHECKING, Annotated, Any

import typer

from profiles.errors import DishwrightError, GeometryError, JobError

if TYPE_CHECKING:
    from fabricate.order import Order

PASSED, FAILED, REFUSED = 0, 1, 2
DEMO = Path(__file__).with_name("demo") / "terrace-heater.toml"

app = typer.Typer(
    name="dishwright",
    help="From a reflector's optical specification to a proved mould: curve, drawing, solid, program, sag table.",
    no_args_is_help=True,
    add_completion=False,
    rich_markup_mode=None,
    pretty_exceptions_enable=False,
)

JobFile = Annotated[Path, typer.Argument(metavar="JOB.toml", help="The job file.", show_default=False)]
AsJson = Annotated[bool, typer.Option("--json", help="Print one JSON object and nothing else.")]


def main() -> None:
    """Run the command and leave with its exit code; the entry point of ``dishwright``."""
    _settle_streams()
    code: int | str | None = PASSED
    try:
        app()
    except SystemExit as leaving:
        code = leaving.code
    except OSError as error:
        code = _unwritable(error)
    sys.exit(code)


def _settle_streams() -> None:
    """Give what is closed a place to go, and let a character that cannot be shown be escaped."""
    for name in ("stdout", "stderr"):
        if getattr(sys, name) is None:
            setattr(sys, name, open(os.devnull, "w", encoding="utf-8"))  # noqa: PTH123, SIM115 - open until the end
    if isinstance(sys.stdout, io.TextIOWrapper):
        sys.stdout.reconfigure(errors="backslashreplace")


def _unwritable(error: OSError) -> int:
    """Say that standard output is full or closed, and drop what is still waiting for it: no traceback at the end."""
    with suppress(OSError):
        sys.stderr.write(
            f"standard output: can't be written: {error.strerror}; allowed: room for the result; do: make room\n"
        )
    os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
    return REFUSED


@contextmanager
def _refusals(job: Path | None = None) -> Iterator[None]:
    """Turn what the product refuses into a message and exit code 2; what is said of a job begins with its file."""
    try:
        yield
    except DishwrightError as error:
        message, head = str(error), f"{job}: "
        if job is not None and isinstance(error, JobError | GeometryError) and not message.startswith(head):
            message = head + message
        if " mm" in message and job is not None and _in_inches(job):
            message += " (lengths here are in mm: 1 in is 25.4 mm)"
        typer.echo(message, err=True)
        raise typer.Exit(REFUSED) from error


def _in_inches(job: Path) -> bool:
    """Whether a job that was understood is one in inches."""
    from fabricate.job import read_job

    try:
        return read_job(job).units == "inch"
    except DishwrightError:
        return False


def _order(path: Path) -> Order:
    from fabricate.job import read_job
    from fabricate.order import Order

    return Order(read_job(path))


def _print_json(value: dict[str, Any]) -> None:
    typer.echo(json.dumps(value, indent=1, allow_nan=False))


@app.command()
def make(
    job: Annotated[
        Path | None,
        typer.Argument(metavar="[JOB.toml]", help="The job file; without one, the demo job.", show_default=False),
    ] = None,
    output: Annotated[
        Path | None,
        typer.Option(
            "--output", "-o", metavar="FOLDER", help="Where the package goes; else one named after the job file."
        ),
    ] = None,
    *,
    replace: Annotated[
        bool,
        typer.Option("--replace", help="Put it in the place of another package, which is kept as FOLDER.previous."),
    ] = False,
    from_mould: Annotated[
        Path | None,
        typer.Option(
            "--from-mould",
            metavar="DRAWING.dxf|READINGS.csv",
            help="Write nothing: say what part the job's sheet becomes on this existing mould.",
        ),
    ] = None,
    as_json: AsJson = False,
) -> None:
    """Make the work package of a job: write it, read it back, prove it, and put it in its place."""
    source = job or DEMO
    if from_mould is not None:
        unused = [name for name, given in (("--output", output is not None), ("--replace", replace)) if given]
        _say_what_a_mould_makes(source, from_mould, unused, as_json=as_json)
        return
    with _refusals(source):
        from fabricate.make import ProofFailedError, make_package
        from fabricate.summary import proof_lines, summary_json, summary_text

        order = _order(source)
        try:
            made = make_package(order, output or Path(source.stem), replace=replace)
        except ProofFailedError as error:
            typer.echo(str(error), err=True)
            if as_json:
                _print_json({"proof": error.proof.as_json()})
            else:
                typer.echo("\n".join(proof_lines(error.proof, order.job.units)))
            raise typer.Exit(FAILED) from error
        if as_json:
            _print_json(summary_json(order, made))
        else:
            typer.echo(summary_text(order, made), nl=False)


def _say_what_a_mould_makes(job: Path, mould: Path, unused: list[str], *, as_json: bool) -> None:
    with _refusals():
        if unused:
            raise JobError(
                f"{' and '.join(unused)}: given beside --from-mould, which writes no package; allowed: --json beside "
                "it; do: leave one of them out"
            )
    with _refusals(job):
        from textwrap import wrap

        from fabricate.from_mould import part_of_mould, words
        from fabricate.job import read_job

        understood = read_job(job)
        found = part_of_mould(understood, mould)
        if as_json:
            _print_json({"units": understood.units, **found.as_json(understood.units)})
        else:
            wrapped = (line for text in words(found, understood) for line in wrap(text, 100, subsequent_indent="  "))
            typer.echo("\n".join(wrapped))


@app.command()
def prove(
    job: JobFile,
    folder: Annotated[Path, typer.Argument(metavar="FOLDER", help="The package.", show_default=False)],
    *,
    as_json: AsJson = False,
) -> None:
    """Read every file of a package back and measure it against the job's exact mould curve."""
    with _refusals(job):
        from fabricate.proof import prove_package
        from fabricate.summary import proof_lines

        order = _order(job)
        proof = prove_package(order, folder)
        if as_json:
            _print_json(proof.as_json())
        else:
            typer.echo("\n".join(proof_lines(proof, order.job.units)))
    raise typer.Exit(PASSED if proof.passed else FAILED)


@app.command()
def table(
    job: JobFile,
    *,
    csv: Annotated[bool, typer.Option("--csv", help="Comma-separated, for a file or a pipe.")] = False,
    stations: Annotated[int, typer.Option(min=2, max=1000, help="Number of stations, even in radius.")] = 17,
) -> None:
    """Print the sag-versus-radius table for the bench."""
    with _refusals(job):
        from fabricate.inspection import sag_columns, sag_table
        from outputs.table import aligned_text, table_text

        order = _order(job)
        columns = sag_columns(sag_table(order.chain, order.job.units, stations=stations), order.sha256, order.tolerance)
        text = table_text(columns) if csv or not sys.stdout.isatty() else aligned_text(columns)
        typer.echo(text, nl=False)


@app.command()
def materials(
    *,
    use: Annotated[str | None, typer.Option(help="Only sheets or only moulds: sheet, mould.")] = None,
    kind: Annotated[list[str] | None, typer.Option(help="Only these kinds, such as metal; may be repeated.")] = None,
    source: Annotated[bool, typer.Option("--source", help="Show where each value comes from.")] = False,
) -> None:
    """Print the material table, or with --source where each of its values comes from."""
    with _refusals():
        from fabricate.materials_listing import listing

        typer.echo(listing(use, tuple(kind or ()), with_sources=source), nl=False)


@app.command()
def new(  # noqa: PLR0913 - each option is a parameter
    *,
    output: Annotated[
        Path | None, typer.Option("--output", "-o", metavar="JOB.toml", help="File to write; else standard output.")
    ] = None,
    title: Annotated[str | None, typer.Option(help="What the part is called.")] = None,
    units: Annotated[str | None, typer.Option(help="mm or inch.")] = None,
    focal_length: Annotated[str | None, typer.Option(help="Of the reflecting face.")] = None,
    depth: Annotated[str | None, typer.Option(help="Vertex to rim plane, instead of the focal length.")] = None,
    rim_diameter: Annotated[str | None, typer.Option(help="On the reflecting face.")] = None,
    hole_diameter: Annotated[str | None, typer.Option(help="Of a central hole.")] = None,
    reflecting_face: Annotated[str | None, typer.Option(help="concave or convex.")] = None,
    material: Annotated[str | None, typer.Option(help="Of the sheet; see `dishwright materials`.")] = None,
    thickness: Annotated[str | None, typer.Option(help="Of the sheet.")] = None,
    gauge: Annotated[str | None, typer.Option(help="Of the sheet, with its system, instead of the thickness.")] = None,
    gauge_system: Annotated[str | None, typer.Option(help="AWG, SWG, USG, MSG or, for copper, oz/ft2.")] = None,
    process: Annotated[
        str | None, typer.Option(help="spinning, shear-spinning, drape-forming or straight-vacuum.")
    ] = None,
    contact_face: Annotated[str | None, typer.Option(help="The sheet's face on the mould: concave or convex.")] = None,
    mould_material: Annotated[str | None, typer.Option(help="See `dishwright materials`.")] = None,
    setting: Annotated[
        list[str] | None,
        typer.Option("--set", metavar="KEY=VALUE", help="Any other key, such as forming.springback.law=none."),
    ] = None,
    turning: Annotated[bool, typer.Option("--turning", help="Lay out the table for a turning program too.")] = False,
) -> None:
    """Write a commented starter job with what the shop has in hand filled in."""
    stated = {
        "title": title,
        "units": units,
        "reflector.reflecting_face": reflecting_face,
        "sheet.material": material,
        "sheet.gauge": gauge,
        "sheet.gauge_system": gauge_system,
        "forming.process": process,
        "forming.contact_face": contact_face,
        "mould.material": mould_material,
    }
    measured = {
        "reflector.focal_length": focal_length,
        "reflector.depth": depth,
        "reflector.rim_diameter": rim_diameter,
        "reflector.hole_diameter": hole_diameter,
        "sheet.thickness": thickness,
    }
    with _refusals():
        from fabricate.new_job import new_job, settings, typed_number, unknown_sheet

        numbers = {key: typed_number(text) for key, text in measured.items() if text is not None}
        given = {key: value for key, value in stated.items() if value is not None} | numbers | settings(setting or ())
        text, gaps = new_job(given, with_turning=turning)
        if output is None:
            typer.echo(text, nl=False)
        else:
            _write_new(output, text)
            typer.echo(f"{output}: written", err=True)
    if strange := unknown_sheet(given):
        typer.echo(strange, err=True)
    if gaps:
        typer.echo("still to be stated: " + ", ".join(gaps), err=True)


def _write_new(path: Path, text: str) -> None:
    from outputs.package import write_file

    if path.exists():
        raise JobError(f"{path}: exists already; allowed: a new name; do: choose another, or move the old file away")
    write_file(path, text)


@app.callback(invoke_without_command=True)
def _about(*, version: Annotated[bool, typer.Option("--version", help="Print the version.")] = False) -> None:
    if version:
        from importlib.metadata import version as installed

        typer.echo(f"dishwright {installed('dishwright')}")
        raise typer.Exit(PASSED)

"""The command: serve, migrate, assess a file, print the OpenAPI document."""

import argparse
import json
import sys
from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING

from faultloop import __version__

if TYPE_CHECKING:
    from faultloop.exchange.judging import Judged
    from faultloop.exchange.uploads import Read


def _serve(options: argparse.Namespace) -> int:
    """Start the service; an empty database is migrated, one that is behind is refused."""
    import uvicorn

    from faultloop.api.app import create_app

    settings = _settings(options)
    if (fault := _prepared(settings.database_url)) is not None:
        print(fault, file=sys.stderr)
        return 1
    uvicorn.run(
        create_app(settings),
        host=options.host,
        port=options.port,
        log_level="warning",
        access_log=False,
        timeout_graceful_shutdown=10,
    )
    return 0


def _prepared(url: str) -> str | None:
    """Make the database ready, or say why it is not."""
    from faultloop.records.database import open_engine
    from faultloop.records.errors import RecordsError
    from faultloop.records.migrate import migrate, state

    try:
        engine = open_engine(url)
        try:
            found = state(engine)
            if found == "empty":
                migrate(engine)
        finally:
            engine.dispose()
    except RecordsError as error:
        return f"faultloop: {error}"
    return {
        "behind": "faultloop: the database holds older tables: make a copy of it, then run `faultloop migrate`",
        "unknown": "faultloop: the database was written by a newer version; use that version",
    }.get(found)


def _migrate(options: argparse.Namespace) -> int:
    from faultloop.records.database import open_engine
    from faultloop.records.errors import RecordsError
    from faultloop.records.migrate import migrate

    try:
        engine = open_engine(_settings(options).database_url)
        migrate(engine)
        engine.dispose()
    except RecordsError as error:
        print(f"faultloop: {error}", file=sys.stderr)
        return 1
    print("The database holds the tables of this version.")
    return 0


def _settings(options: argparse.Namespace):  # type: ignore[no-untyped-def]
    from faultloop.settings import Settings

    return Settings() if options.database_url is None else Settings(database_url=options.database_url)


def _assess(options: argparse.Namespace) -> int:
    """Judge a CSV file of points; exit status 1 when the file cannot be read at all."""
    from faultloop.exchange.batch_answers import answer_csv
    from faultloop.exchange.batches import BatchQuery
    from faultloop.exchange.columns import FileRefused
    from faultloop.exchange.judging import judged
    from faultloop.exchange.listing import table
    from faultloop.exchange.uploads import Upload, read_upload

    query = BatchQuery(default=options.default, decimal=options.decimal, ignore=options.ignore)
    try:
        content = sys.stdin.buffer.read() if options.file == "-" else Path(options.file).read_bytes()
        upload = Upload("csv", content, query)
        read = read_upload(upload)
    except (OSError, FileRefused) as error:
        print(f"faultloop: {options.file}: {error}", file=sys.stderr)
        return 1
    batch = judged(read.rows)
    for name, value in read.reading["defaults"].items():
        print(f"Default: {name} = {value}", file=sys.stderr)
    if options.output == "html":
        return _workshop_page(read, batch, options, upload.input_digest)
    sys.stdout.write(answer_csv(batch) if options.output == "csv" else table(batch) + "\n")
    if options.output == "table":
        print("An aid to a competent person; it gives no permission, and local rules and licensed persons decide.")
    return 0


def _workshop_page(read: "Read", batch: "Judged", options: argparse.Namespace, input_digest: str) -> int:
    """Print the workshop view of a file as a page."""
    from faultloop.exchange.workshop import PopulationTooSmall, workshop
    from faultloop.exchange.workshop_view import Workshop
    from faultloop.exchange.workshop_words import workshop_words
    from faultloop.reports.workshop import workshop_page

    try:
        view = workshop(read, batch, {}, options.population, input_digest, options.language)
    except PopulationTooSmall as error:
        print(f"faultloop: population: {error}", file=sys.stderr)
        return 1
    words = workshop_words(options.language).model_dump()
    sys.stdout.write(workshop_page(Workshop.model_validate(view).model_dump(), words))
    return 0


def _openapi(_: argparse.Namespace) -> int:
    from faultloop.api.app import create_app
    from faultloop.settings import Settings

    print(json.dumps(create_app(Settings()).openapi(), indent=1, ensure_ascii=False))
    return 0


def _default(text: str) -> str:
    if not text.partition("=")[1] or text.startswith("="):
        raise argparse.ArgumentTypeError("write column=value, for instance earthing=TN-S")
    return text


def _parser() -> argparse.ArgumentParser:
    from faultloop.assessment.texts import LANGUAGES

    parser = argparse.ArgumentParser(prog="faultloop", description=__doc__)
    parser.add_argument("--version", action="version", version=__version__)
    commands = parser.add_subparsers(required=True, metavar="COMMAND")
    serve = commands.add_parser("serve", help="start the service")
    serve.add_argument("--host", default="127.0.0.1", help="address to listen on (default %(default)s)")
    serve.add_argument("--port", type=int, default=8080, help="port to listen on (default %(default)s)")
    serve.set_defaults(run=_serve)
    migrate = commands.add_parser("migrate", help="bring the database to the tables of this version")
    migrate.set_defaults(run=_migrate)
    for command in (serve, migrate):
        command.add_argument("--database-url", help="sqlite:///FILE or postgresql://...; else FAULTLOOP_DATABASE_URL")
    assess = commands.add_parser("assess", help="judge a CSV file of points, one row a point")
    assess.add_argument("file", metavar="FILE", help="CSV file, or - for standard input")
    assess.add_argument("--output", choices=("table", "csv", "html"), default="table")
    assess.add_argument("--population", type=int, help="number of points that there are, for the page of --output html")
    assess.add_argument(
        "--language", choices=LANGUAGES, default=LANGUAGES[0], help="of the page of --output html (default %(default)s)"
    )
    assess.add_argument("--default", type=_default, action="append", default=[], metavar="COLUMN=VALUE")
    assess.add_argument("--decimal", choices=("point", "comma"), help="decimal mark, where the file leaves it open")
    assess.add_argument(
        "--ignore", action="append", default=[], metavar="HEADING", help="a column that holds nothing to be judged"
    )
    assess.set_defaults(run=_assess)
    openapi = commands.add_parser("openapi", help="print the OpenAPI document")
    openapi.set_defaults(run=_openapi)
    return parser


def main(arguments: Sequence[str] | None = None) -> int:
    """Run the command."""
    options = _parser().parse_args(arguments)
    status: int = options.run(options)
    return status


if __name__ == "__main__":
    sys.exit(main())

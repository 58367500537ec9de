"""Reading what is remembered."""

from sqlalchemy import Engine, select

from .database import reaching
from .errors import DatabaseUnreachable
from .migrate import state
from .tables import ASSESSMENT, LISTED_FIELDS, Listed, Stored, stored


def find(engine: Engine, id: str) -> Stored | None:  # noqa: A002
    """Give the assessment with this id, if there is one."""
    with reaching(engine), engine.connect() as connection:
        row = connection.execute(select(ASSESSMENT).where(ASSESSMENT.c.id == id)).mappings().one_or_none()
    return None if row is None else stored(row)


def page(
    engine: Engine,
    *,
    before: int | None = None,
    size: int,
    verdict: str | None = None,
    urgency: str | None = None,
) -> list[Listed]:
    """List assessments newest first, those before a sequence number only; an empty list is the end.

    What was stored when the first page was read is neither skipped nor repeated by what is added later.
    """
    wanted = select(*(ASSESSMENT.c[name] for name in LISTED_FIELDS))
    if before is not None:
        wanted = wanted.where(ASSESSMENT.c.sequence < before)
    if verdict is not None:
        wanted = wanted.where(ASSESSMENT.c.verdict == verdict)
    if urgency is not None:
        wanted = wanted.where(ASSESSMENT.c.urgency == urgency)
    with reaching(engine), engine.connect() as connection:
        rows = connection.execute(wanted.order_by(ASSESSMENT.c.sequence.desc()).limit(size)).all()
    return [Listed(*row) for row in rows]


def ready(engine: Engine) -> bool:
    """Tell whether the database answers and holds the tables that this code expects."""
    try:
        return state(engine) == "current"
    except DatabaseUnreachable:
        return False

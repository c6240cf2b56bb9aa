"""When desks began, and the saved states of their models."""

from __future__ import annotations

from dataclasses import dataclass

from sqlalchemy import Connection, select, update
from sqlalchemy.dialects.sqlite import insert as upsert

from vanner.store.schema import desk_state


@dataclass(frozen=True, slots=True)
class Checkpoint:
    """A model's saved state.

    Attributes:
        at_s: The pulse end after which it was taken.
        parameters: JSON text of the parameters under which the state was made.
        version: The state's format.
    """

    at_s: float
    parameters: str
    version: int
    state: bytes


def begin_desk(connection: Connection, desk: str, started_s: float) -> None:
    """Note when a desk began, unless it has begun already."""
    connection.execute(
        upsert(desk_state).values(desk=desk, started_s=started_s).on_conflict_do_nothing()
    )


def desk_starts(connection: Connection) -> dict[str, float]:
    """When each desk began, in Unix seconds."""
    rows = connection.execute(select(desk_state.c.desk, desk_state.c.started_s))
    return {row.desk: row.started_s for row in rows}


def keep_checkpoint(connection: Connection, desk: str, saved: Checkpoint) -> None:
    """Save a model's state in place of the desk's earlier one."""
    connection.execute(
        update(desk_state)
        .where(desk_state.c.desk == desk)
        .values(
            checkpoint_s=saved.at_s,
            parameters=saved.parameters,
            state_version=saved.version,
            state=saved.state,
        )
    )


def checkpoint_of(connection: Connection, desk: str) -> Checkpoint | None:
    """A desk's saved state, or None before the first."""
    row = connection.execute(select(desk_state).where(desk_state.c.desk == desk)).one_or_none()
    if row is None or row.state is None:
        return None
    return Checkpoint(row.checkpoint_s, row.parameters, row.state_version, row.state)

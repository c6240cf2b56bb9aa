"""A desk in service: its plan, its model, and how items become terms for it."""

from __future__ import annotations

import hashlib
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace

from vanner.daemon.plan import DeskPlan, is_away, pack_plan, unpack_plan
from vanner.errors import DatabaseError
from vanner.model.desk import DeskModel, PulseResult, TermItem
from vanner.model.state import STATE_VERSION, StateError, pack, retune, unpack
from vanner.records import StoredItem
from vanner.store.checkpoints import Checkpoint, checkpoint_of, keep_checkpoint
from vanner.store.database import Database
from vanner.store.pulses import pulses_between
from vanner.terms import count_terms

# Taught items of one pulse are read so many at a time, so that a long archive taught at once
# is read against what its own beginning taught.
TAUGHT_AT_ONCE = 500


@dataclass(slots=True)
class Desk:
    """A plan and the model that follows it.

    Attributes:
        started_s: What was received before is not the desk's.
        story_ids: Story number -> the database's id, as far as known.
    """

    plan: DeskPlan
    model: DeskModel
    started_s: float
    story_ids: dict[int, int] = field(default_factory=dict)

    def checkpoint(self, at_s: float) -> Checkpoint:
        """The model's state after the pulse that ended at `at_s`."""
        return Checkpoint(at_s, pack_plan(self.plan), STATE_VERSION, pack(self.model))


def term_items(items: Sequence[StoredItem]) -> list[TermItem]:
    """Items as counted terms, in their order."""
    return [_term_item(item) for item in items]


def _term_item(item: StoredItem) -> TermItem:
    terms = count_terms(item.title, item.content_text)
    return TermItem(
        item_id=item.item_id,
        revision=item.revision,
        published_s=item.published_s,
        received_s=item.received_s,
        teaches=item.teaches,
        terms=terms,
        copy_key=_copy_key(item.item_id, terms),
    )


def _copy_key(item_id: int, terms: Mapping[str, int]) -> str:
    """Equal for items with the same words in the same numbers; an empty item is no copy."""
    if not terms:
        return f"empty {item_id}"
    text = "\n".join(f"{term} {number}" for term, number in sorted(terms.items()))
    return hashlib.blake2b(text.encode("utf-8", "surrogatepass"), digest_size=16).hexdigest()


def step(model: DeskModel, end_s: float, items: Sequence[TermItem]) -> list[PulseResult]:
    """A pulse's items through a model: taught ones first, oldest first, then the rest at once."""
    taught = sorted((item for item in items if item.teaches), key=lambda item: item.published_s)
    results = [
        model.step(end_s, taught[start : start + TAUGHT_AT_ONCE])
        for start in range(0, len(taught), TAUGHT_AT_ONCE)
    ]
    arrived = [item for item in items if not item.teaches]
    if arrived or not taught:
        results.append(model.step(end_s, arrived))
    return results


def new_desk(plan: DeskPlan, started_s: float) -> Desk:
    """A desk that has read nothing."""
    return Desk(plan, DeskModel(plan.parameters), started_s)


def restored_desk(
    database: Database, plan: DeskPlan, saved: Checkpoint, read_s: float, started_s: float
) -> Desk:
    """A desk as it stood after the pulse that ended at `read_s`.

    The pulses after the checkpoint are derived again, under the plan of that time and without
    writing anything: their results are committed already. Only then does today's plan hold.

    Raises:
        DatabaseError: The state is of another version's format.
    """
    earlier = unpack_plan(saved.parameters)
    try:
        model = unpack(saved.state, earlier.parameters)
    except StateError as error:
        raise DatabaseError(
            f"The database {database.path} holds {error} of desk {plan.desk}; "
            "run `vanner rebuild` to derive it again."
        ) from error
    if is_away(saved.parameters):
        # What passed meanwhile is not the desk's; it goes on from where it left.
        retune(model, plan.parameters, read_s)
        return Desk(plan, model, started_s)
    pulse_s = earlier.parameters.pulse_s
    for end_s, items in pulses_between(database, saved.at_s, read_s, pulse_s):
        clear_until(model, end_s, inclusive=False)
        mine = [item for item in items if earlier.reads(item.source)]
        if mine:
            step(model, end_s, term_items(mine))
    clear_until(model, read_s, inclusive=True)
    if earlier.parameters != plan.parameters:
        retune(model, plan.parameters, read_s)
    return Desk(plan, model, started_s)


def clear_until(model: DeskModel, limit_s: float, *, inclusive: bool) -> None:
    """Take the steps of empty pulses in which stories clear, before (or up to) a time."""
    while (due_s := model.next_clearing_s()) is not None:
        if due_s > limit_s or (due_s == limit_s and not inclusive):
            return
        model.step(due_s, [])


def load_desk(database: Database, plan: DeskPlan, read_s: float, started_s: float) -> Desk:
    """A desk as it stands at `read_s`, from then on following this plan.

    Raises:
        DatabaseError: The database refused, or holds a state that cannot be read.
    """
    with database.read() as connection:
        saved = checkpoint_of(connection, plan.desk)
    if saved is None:
        desk = new_desk(plan, started_s)
    else:
        desk = restored_desk(database, plan, saved, read_s, started_s)
        if saved.parameters == pack_plan(plan):
            return desk
    # From here on the desk follows this plan: a crash must not bring the old one back.
    with database.write() as connection:
        keep_checkpoint(connection, plan.desk, desk.checkpoint(read_s))
    return desk


def leave_desk(database: Database, name: str, read_s: float, started_s: float) -> None:
    """Save a desk that is no longer served as it stands, for the case that it returns."""
    with database.read() as connection:
        saved = checkpoint_of(connection, name)
    if saved is None or is_away(saved.parameters):
        return
    plan = unpack_plan(saved.parameters)
    desk = restored_desk(database, plan, saved, read_s, started_s)
    state = replace(desk.checkpoint(read_s), parameters=pack_plan(plan, away=True))
    with database.write() as connection:
        keep_checkpoint(connection, name, state)

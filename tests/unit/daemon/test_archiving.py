"""Archives in their own time, and archives that only teach."""

from itertools import groupby

import pytest
from sqlalchemy import select

from vanner.clock import pulse_of
from vanner.daemon.archiving import BATCHES_A_PULSE, accept_archive, replay, teach
from vanner.daemon.engine import Engine
from vanner.records import RawItem
from vanner.store.schema import item_revision

START_S = 1_700_006_400.0
PULSE_S = 60.0


@pytest.mark.parametrize(
    "published_s",
    [253_402_214_400.0, -62_135_596_800.0, 0.0, START_S + 7200.0],
    ids=["year 9999", "year 1", "1970", "to come"],
)
def test_an_absurd_date_costs_its_line_and_nothing_else(open_database, dump, plan, published_s):
    database, faults = open_database(), []
    archive = [
        RawItem("good", "Tide board", published_s=START_S),
        RawItem("odd", "Ferry", date_raw="as it stood", published_s=published_s),
    ]
    taken = accept_archive(
        database, archive, "past", START_S + 3600.0, faults.append, lambda _: None
    )
    replay(database, [plan()], lambda _: None)
    assert taken.new == 1
    assert [row[2] for row in dump(database)["items"]] == ["good"]
    assert len(faults) == 1
    assert "odd" in faults[0]
    assert "as it stood" in faults[0]


def test_a_taught_archive_is_spread_over_pulses_of_bounded_size(open_database, plan):
    database = open_database()
    engine = Engine(database, [plan()], PULSE_S)
    engine.begin(START_S)
    archive = (RawItem(f"n{n}", f"Tide {n}", published_s=START_S - n) for n in range(5500))
    teach(database, archive, "past", PULSE_S, lambda: START_S, pytest.fail, lambda _: None)
    with database.read() as connection:
        received = connection.execute(
            select(item_revision.c.received_s).order_by(item_revision.c.received_s)
        ).scalars()
        sizes = [
            len(list(members))
            for _, members in groupby(received, lambda time_s: pulse_of(time_s, PULSE_S))
        ]
    assert sum(sizes) == 5500
    assert max(sizes) <= 1000 * BATCHES_A_PULSE


def test_a_taught_item_that_is_revised_in_the_same_pulse_keeps_its_last_reading(
    open_database, feed, dump, plan, arrival
):
    database = open_database()
    engine = Engine(database, [plan()], PULSE_S)
    engine.begin(START_S)
    many = [
        arrival(f"n{n}", f"tide board {n}", START_S + 1.0, teaches=True, late_s=9000.0 - n)
        for n in range(1200)
    ]
    revised = arrival("n3", "ferry aground", START_S + 2.0, teaches=True)
    feed(database, [*many, revised])
    engine.advance(START_S + 600.0)
    rows = dump(database)
    (number,) = [row[0] for row in rows["items"] if row[2] == "n3"]
    assert len(rows["readings"]) == 1200
    assert {row[2] for row in rows["item_topics"] if row[1] == number} <= {"ferry", "aground"}
    assert {row[2] for row in rows["readings"] if row[1] == number} == {2}

"""How the file of cases came to be as it is: one step from each released format to the next."""

from __future__ import annotations

import sqlite3

SCHEMA = 1

_STEPS = {
    0: (
        "create table versions(case_id text not null, version integer not null, saved_at text not null, "
        "body blob not null, digest blob not null, sealed integer not null, note text not null, "
        "primary key(case_id, version)) strict",
        "create table settings(name text primary key, value blob not null) strict",
    ),
}


def migrate(db: sqlite3.Connection, schema: int) -> None:
    """Bring the tables from this format to the newest, inside the transaction of the caller."""
    for step in range(schema, SCHEMA):
        for statement in _STEPS[step]:
            db.execute(statement)

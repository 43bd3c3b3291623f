"""How fast the kit is sized, and how many trips are played, against plain ways of doing the same.

Run:  python tests/benchmarks/bench_kit.py
Selection: random trips of 10 parts with 4 sizes, median and slowest against the goal of 2 s. Endurance: 100,000 trips
of 10 parts against the goal of 0.3 s, and against the same trips played one after the other.
"""

from __future__ import annotations

import sys
import time
from collections.abc import Iterator
from dataclasses import fields, replace
from pathlib import Path

import numpy as np

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))
sys.path.insert(0, str(Path(__file__).resolve().parent))

from measure import Row, against, print_table, spread

from planner.kit.endurance import Assumptions, Carried, Draws, draw_trips, play, run_out
from planner.kit.legs import Choice, Leg, Power
from planner.kit.selection import select

PARTS, TRIPS, DRAWS, ONE_BY_ONE = 10, 40, 100_000, 500
GOAL_SELECT, GOAL_PLAY = "2 s", "0.3 s"
POWER = Power("c", "Portable", 2.2, 78.0, 85.0, 85.0, 0.6, 1, 90.0, 12)
CHOICES = tuple(
    Choice(f"size {number}", f"size {number}", litres, litres, kg, None, kg <= 5.0)
    for number, (litres, kg) in enumerate(((150.0, 2.0), (300.0, 3.7), (430.0, 3.9), (600.0, 6.6)))
)


def random_trip(rng: np.random.Generator) -> list[Leg]:
    """Ten parts with random hours, flows and rules."""
    legs = []
    for number in range(PARTS):
        flight, hours = bool(rng.random() < 0.3), float(rng.uniform(0.5, 6.0))
        legs.append(
            Leg(
                part_id=str(number),
                name=str(number),
                hours=hours,
                oxygen_h=hours,
                cylinder_l_per_h=None if flight else float(rng.uniform(60.0, 180.0)),
                concentrator_w=27.0 if rng.random() < 0.7 else None,
                airline=flight and bool(rng.random() < 0.3),
                stationary=not flight and bool(rng.random() < 0.15),
                mains=bool(rng.random() < 0.2),
                vehicle=False,
                flight=flight,
                supply_here=bool(rng.random() < 0.2),
                carry_limit_kg=float(rng.uniform(8.0, 20.0)) if rng.random() < 0.2 else None,
                terminal=False,
            )
        )
    return legs


def covered_trip() -> tuple[list[Leg], Carried]:
    """The first random trip that a set covers whole, and that set."""
    litres = {choice.key: choice.usable_l for choice in CHOICES}
    for seed in range(1000):
        legs = random_trip(np.random.default_rng(seed))
        found = select(legs, CHOICES, POWER, reserve_fraction=0.25)
        if found.uncovered_h == 0.0 and found.concentrator and found.bought():
            new, most = (
                tuple(sum(count * litres[size] for size, count in there.items()) for there in cylinders)
                for cylinders in ([use.new_cylinders for use in found.uses], [use.cylinders for use in found.uses])
            )
            return legs, Carried(new, most, found.batteries)
    raise SystemExit("no random trip is covered whole")


def one_draw(drawn: Draws, number: int) -> Draws:
    """The draws of a single trip."""
    return replace(drawn, **{one.name: getattr(drawn, one.name)[number : number + 1] for one in fields(drawn)})


def rows() -> Iterator[Row]:
    """The selection, then the trips played."""
    times = []
    for seed in range(TRIPS):
        legs = random_trip(np.random.default_rng(seed))
        start = time.perf_counter()
        select(legs, CHOICES, POWER, reserve_fraction=0.25)
        times.append(1000.0 * (time.perf_counter() - start))
    yield Row(
        f"Kit chosen, {PARTS} parts and {len(CHOICES)} sizes, {TRIPS} random trips", spread(times), goal=GOAL_SELECT
    )

    legs, carried = covered_trip()
    assumed = Assumptions()
    rng = np.random.default_rng(2)
    waits, longer = rng.exponential(20.0, (DRAWS, PARTS)), rng.exponential(10.0, (DRAWS, PARTS))
    drawn = draw_trips(legs, waits, longer, rng, assumed)
    alone = [float(play(legs, carried, POWER, one_draw(drawn, n), assumed).short_h.sum()) for n in range(ONE_BY_ONE)]
    if not np.allclose(alone, play(legs, carried, POWER, drawn, assumed).short_h[:ONE_BY_ONE].sum(axis=1)):
        raise SystemExit("trips played together end otherwise than one by one")
    yield against(
        f"{DRAWS:,} trips of {PARTS} parts played with delays",
        lambda: run_out(
            play(legs, carried, POWER, draw_trips(legs, waits, longer, np.random.default_rng(2), assumed), assumed)
        ),
        lambda: [play(legs, carried, POWER, one_draw(drawn, n), assumed) for n in range(ONE_BY_ONE)],
        "one trip after the other",
        repeats=5,
        share=ONE_BY_ONE / DRAWS,
        goal=GOAL_PLAY,
    )


if __name__ == "__main__":
    print_table(rows())

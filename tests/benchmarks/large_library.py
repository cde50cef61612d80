"""A library of 20,000 invented values, written straight into the tables: adding them one by one takes minutes."""

from __future__ import annotations

import json
import random

from sqlalchemy import Engine, text

from server import storage

MANY = 20_000
PRODUCTS = ("Brackwater R2", "Candleford P3", "Stonegarth E7", "Holmgate T4", "Fjellvik M5")
ADHERENDS = ("dressed softwood", "spruce", "birch ply", "steel S235", "aluminium 6082", "pultruded GFRP")
STATUSES = ("draft", "indicative", "provisional", "approved")


def fill(engine: Engine, many: int = MANY) -> None:
    """Write ``many`` values, each with what ``library.add`` derives from it."""
    chance = random.Random(20)
    rows = [_row(number, chance) for number in range(1, many + 1)]
    with storage.writing(engine) as session:
        for statement in STATEMENTS:
            session.execute(text(statement), rows)


STATEMENTS = (
    "INSERT INTO records (id, key, record_group, created_at) VALUES (:id, :key, 'values', :at)",
    "INSERT INTO record_revisions (id, record_id, n, name, status, entry, details, source, note, made_by, reason, "
    "created_at) VALUES (:id, :id, 1, :name, :status, :entry, :details, :source, '', 'A. Invented', '', :at)",
    "INSERT INTO record_heads (record_id, key, record_group, newest_id, newest, status, in_force, in_force_status, "
    "property) VALUES (:id, :key, 'values', :id, 1, :status, :in_force, :in_force_status, :property)",
    "INSERT INTO record_search (rowid, key, name, words, adherend) VALUES (:id, :key, :name, :words, :adherend)",
)


def _row(number: int, chance: random.Random) -> dict[str, object]:
    product, adherend, status = chance.choice(PRODUCTS), chance.choice(ADHERENDS), chance.choice(STATUSES)
    property = chance.choice(("bond shear", "pull-off"))
    value = f"{1 + 9 * chance.random():.3g} MPa"
    entry = {"property": property, "origin": "published", "value": value}
    source = f"Invented table {number % 97}"
    return {
        "id": number,
        "key": f"V-{number:05d}",
        "at": "2026-12-01T09:00:00Z",
        "name": f"{product} on {adherend}, series {number}",
        "status": status,
        "in_force": 1 if status == "approved" else None,
        "in_force_status": status if status == "approved" else None,
        "property": property,
        "entry": json.dumps(entry),
        "details": json.dumps({"product": product, "surface_a_material": adherend}),
        "source": source,
        "words": "\n".join([product, adherend, source, "A. Invented", property, value]),
        "adherend": adherend,
    }

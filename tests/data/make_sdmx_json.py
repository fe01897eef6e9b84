"""Example files in SDMX-JSON 1.0 and 2.0, and in the draft before them."""

import json

from tests.data.make_sdmx import FLAGS, ITEMS, LABELLED, flag
from tests.data.truth import ISO_MONTHS, NAN, PRICES, Example, Expected


def _component(name: str, label: str, values: list[tuple[str, str]], place: int | None) -> dict:
    given = {"id": name, "name": label, "values": [{"id": c, "name": t} for c, t in values]}
    return given if place is None else {**given, "keyPosition": place}


def _structure(*, flat: bool, group: bool) -> dict:
    """Write the structure of a JSON message."""
    frequency = _component("FREQ", "Frequency", [("M", "Monthly")], 0)
    items = _component("ITEM", "Item", [(item[0], item[1]) for item in ITEMS], 1)
    time = _component("TIME_PERIOD", "Time", [(text, text) for text in ISO_MONTHS], 2)
    unit = _component("UNIT_MEASURE", "Unit", [(item[2], item[3]) for item in ITEMS], None)
    times = _component("UNIT_MULT", "Multiplier", [("0", "Units"), ("6", "Millions")], None)
    adjusted = _component("ADJUSTMENT", "Adjustment", [("N", "None"), ("Y", "Both")], None)
    status = _component("OBS_STATUS", "Status", [(code, code) for code in "ABEP"], None)
    noted = [unit, times, adjusted]
    return {
        "name": "Prices of Uldrevay",
        "dimensions": {
            "dataSet": [frequency],
            "series": [] if flat else [items],
            "observation": [items, time] if flat else [time],
        },
        "attributes": {
            "dataSet": [],
            "dimensionGroup": noted if group else [],
            "series": [] if group or flat else noted,
            "observation": [status] if group or not flat else [status, *noted],
        },
    }


def _json_data(*, flat: bool, group: bool) -> dict:
    """Write the data set that goes with `_structure`."""
    if flat:
        found = {}
        for number, item in enumerate(ITEMS):
            for place, value in enumerate(item[6]):
                extra = [] if group else [number, number, number]
                found[f"{number}:{place}"] = [value, "ABEP".index(flag(item[0], place)), *extra]
        groups = {f":{number}:": [number, number, number] for number in range(len(ITEMS))}
        return {"observations": found, **({"dimensionGroupAttributes": groups} if group else {})}
    return {
        "series": {
            str(number): {
                "attributes": [number, number, number],
                "observations": {
                    str(place): [value, "ABEP".index(flag(item[0], place)), None]
                    for place, value in enumerate(item[6])
                },
            }
            for number, item in enumerate(ITEMS)
        }
    }


def examples() -> dict[str, Example]:
    """SDMX-JSON: file name to example."""
    meta = {"id": "ULD1", "prepared": "2024-01-15T09:00:00Z", "sender": {"id": "ULD"}}

    def first(flat: bool) -> dict:
        data = {"action": "Information", **_json_data(flat=flat, group=False)}
        return {
            "meta": meta,
            "data": {"structure": _structure(flat=flat, group=False), "dataSets": [data]},
        }

    def second(flat: bool, group: bool) -> dict:
        data = {"structure": 0, "action": "Replace", **_json_data(flat=flat, group=group)}
        return {
            "meta": meta,
            "data": {"structures": [_structure(flat=flat, group=group)], "dataSets": [data]},
        }

    draft = {
        "header": {**meta, "test": False},
        "structure": _structure(flat=False, group=False),
        "dataSets": [{"action": "Replace", **_json_data(flat=False, group=False)}],
    }
    tongues = second(False, False)
    for part in tongues["data"]["structures"][0]["dimensions"]["series"][0]["values"]:
        part["names"] = {"fr": "Autre", "en": part.pop("name")}
    tongues["data"]["dataSets"][0]["series"]["0"]["observations"]["3"][0] = "NaN"
    hole = [*PRICES[:3], NAN, *PRICES[4:]]
    messages = {
        "sdmx_json_1.json": (first(False), LABELLED),
        "sdmx_json_1_flat.json": (first(True), LABELLED),
        "sdmx_json_2.json": (second(False, False), LABELLED),
        "sdmx_json_2_flat_groups.json": (second(True, True), LABELLED),
        "sdmx_json_2_languages.json": (
            tongues,
            [Expected("Consumer prices", hole, attributes=LABELLED[0].attributes), LABELLED[1]],
        ),
        "sdmx_json_draft.json": (draft, LABELLED),
    }
    return {
        name: Example((json.dumps(message, indent=1) + "\n").encode(), series, FLAGS)
        for name, (message, series) in messages.items()
    }

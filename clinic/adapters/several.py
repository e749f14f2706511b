"""Several values of one kind at a visit, reduced to the one that rules use.

Acuity: the one on the scale and with the correction of the last one used, else the best corrected,
else the first entered. Pressure before treatment: the highest, so that no doubt silences a raise.
"""

from collections import defaultdict
from collections.abc import Mapping, Sequence
from typing import Any

from clinic.adapters.records import Records
from trends import words
from trends.measures.acuity import parse

Row = Mapping[str, Any]
Comparable = tuple[str, str]


def one_of_each(records: Records) -> dict[Any, Row]:
    """Return the measured records by (visit, eye), with the acuity and pressure that count."""
    found = dict(records.measured)
    for key, row in records.measured.items():
        others = records.more_pressures.get(row["pk"], ())
        if others:
            found[key] = {**row, **_highest(row, others)}
    for keys in _eyes_with_several(records):
        _choose_acuities(found, keys, records)
    return found


def _highest(row: Row, others: Sequence[Row]) -> Row:
    all_of_them = [one for one in (row, *others) if one["iop_tenths"] is not None]
    best = max(all_of_them, key=lambda one: int(one["iop_tenths"]))
    return {name: best[name] for name in ("iop_tenths", "iop_method")}


def _eyes_with_several(records: Records) -> list[list[Any]]:
    """Return the keys of each eye that ever had two acuities at a visit, oldest first."""
    several = {
        eye for (_visit, eye), row in records.measured.items() if row["pk"] in records.more_acuities
    }
    order = {visit["pk"]: (visit["day"], visit["entry"]) for visit in records.visits}
    found: dict[int, list[Any]] = defaultdict(list)
    for key in sorted(records.measured, key=lambda key: order[key[0]]):
        if key[1] in several:
            found[key[1]].append(key)
    return list(found.values())


def _choose_acuities(found: dict[Any, Row], keys: Sequence[Any], records: Records) -> None:
    last: Comparable | None = None
    for key in keys:
        row = found[key]
        offered = [row, *records.more_acuities.get(row["pk"], ())]
        offered = [one for one in offered if one["acuity"]]
        if not offered:
            continue
        chosen = _chosen(offered, last)
        found[key] = {**row, **{name: chosen[name] for name in chosen if name in row}}
        last = _comparable(chosen) or last


def _chosen(offered: Sequence[Row], last: Comparable | None) -> Row:
    like_last = [one for one in offered if last is not None and _comparable(one) == last]
    return like_last[0] if like_last else min(offered, key=_rank_of_correction)


def _comparable(row: Row) -> Comparable | None:
    """Return the scale and correction of an acuity; None off the chart, which has no scale."""
    read = parse(row["acuity_notation"], row["acuity"], row["acuity_chart"])
    return (read.scale, row["acuity_correction"]) if read.logmar_e4 is not None else None


def _rank_of_correction(row: Row) -> tuple[bool, int]:
    """Order acuities on the chart first, then by how well the eye was corrected."""
    given = row["acuity_correction"]
    rank = words.CORRECTIONS.index(given) if given else len(words.CORRECTIONS)
    return _comparable(row) is None, rank

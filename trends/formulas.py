"""Formulas with their source, and the arithmetic of each one's example, worked out when asked."""

import tomllib
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from functools import cache
from importlib import resources
from itertools import combinations
from typing import Any

import numpy as np

from trends import slope
from trends.citations import Citation, citation
from trends.measures import blood, logmar, osmosis, pressure, scoring
from trends.measures import check_characters as checks
from trends.measures.repeatability import repeatability

Given = Mapping[str, Any]
Worker = Callable[[Given], list[str]]


@dataclass(frozen=True)
class Formula:
    """One formula in words, its source, and an invented example's inputs."""

    name: str
    title: str
    words: str
    citation: Citation
    place: str
    memory: bool
    note: str
    example: Given

    def arithmetic(self) -> list[str]:
        """Return the example with its numbers filled in, by running the formula."""
        return WORKERS[self.name](self.example)


def _four(e4: int) -> str:
    return f"{e4 / logmar.E4:.4f}".replace("-", "−")


def _letters(given: Given) -> list[str]:
    e4 = given["logmar_e4"]
    exact = logmar.letters_exact(e4)
    return [f"85 − 50 × {_four(e4)} = {exact:g} → {logmar.letters_of(e4)} letters"]


def _label(given: Given) -> tuple[str, int]:
    """Return a Snellen label as printed, and its exact logMAR in ten-thousandths."""
    top, bottom = given["numerator"], given["denominator"]
    return f"{top}/{bottom}", logmar.e4_of(top / bottom)


def _fraction(given: Given) -> list[str]:
    label, e4 = _label(given)
    return [f"−log10({label}) = {_four(e4)} logMAR"]


def _snapped(given: Given) -> list[str]:
    label, e4 = _label(given)
    line = logmar.snapped(e4)
    off = _four(abs(e4 - line))
    return [
        f"−log10({label}) = {_four(e4)}",
        f"{off} off the line {_four(line)}, at most {_four(logmar.SNAP_E4)}: "
        f"counted as {_four(line)} logMAR",
    ]


def _chart_test(given: Given) -> list[str]:
    far, near = given["at_4m"], given["at_1m"]
    return [f"{far} at 4 m, below 20; {far} + {near} = {scoring.letters_from_test(far, near)}"]


def _hundred(given: Given) -> list[str]:
    return [f"{given['score']} − 15 = {scoring.letters_from_100_based(given['score'])} letters"]


def _mean(given: Given) -> list[str]:
    values = given["logmar_e4"]
    mean = logmar.mean_e4(values)
    shown = " and ".join(f"{_four(one)} ({logmar.snellen_words(one)})" for one in values)
    decimals = sum(logmar.decimal_of(one) for one in values) / len(values)
    return [
        f"mean of {shown} = {_four(int(mean))} logMAR = 20/{logmar.denominator_20(mean):.1f}",
        f"averaged as decimals it would read {decimals:g} = 20/{20 / decimals:.1f}",
    ]


def _repeat(given: Given) -> list[str]:
    found, letters = repeatability("letters", "etdrs"), given["letters"]
    half = found.tenths // 10 if found else 0
    return [f"{letters} ± {half} letters: {letters - half} to {letters + half}"]


def _map(given: Given) -> list[str]:
    high, low = given["systolic"], given["diastolic"]
    return [f"{low} + ({high} − {low}) / 3 = {pressure.mean_arterial(high, low):.1f} mmHg"]


def _perfusion(given: Given) -> list[str]:
    high, low, iop = given["systolic"], given["diastolic"], given["iop"]
    mean, found = pressure.mean_arterial(high, low), pressure.perfusion(high, low, iop)
    return [*_map(given), f"2/3 × {mean:.1f} − {iop} = {found:.1f} mmHg"]


def _part_perfusion(given: Given) -> list[str]:
    iop = given["iop"]
    return [
        f"{given[name]} − {iop} = {pressure.part_perfusion(given[name], iop):g} mmHg"
        for name in ("systolic", "diastolic")
    ]


def _osmotic(given: Given) -> list[str]:
    tenths = given["protein_tenths"]
    shown = " + ".join(f"{one:.2f}" for one in osmosis.terms(tenths))
    found = osmosis.colloid_osmotic(tenths)
    return [f"C = {blood.protein_shown(tenths)} g/dL: {shown} = {found:.1f} mmHg"]


def _theil_sen(given: Given) -> list[str]:
    days, values = given["days"], given["cst_um"]
    pairs = len(days) * (len(days) - 1) // 2
    per_day = slope.theil_sen(np.array(days, dtype=float), np.array(values, dtype=float))
    shown = ", ".join(map(str, values))
    return [
        f"{shown} µm on days {', '.join(map(str, days))}",
        f"median of {pairs} slopes = {per_day:.4f} µm a day = {per_day * 28:.1f} µm in 28 days",
    ]


def _mann_kendall(given: Given) -> list[str]:
    values = given["cst_um"]
    pairs = list(combinations(values, 2))
    rising, falling = sum(a < b for a, b in pairs), sum(a > b for a, b in pairs)
    s = int(slope.kendall_s(np.array([values], dtype=float))[0])
    beyond, every = slope.tail(len(values), abs(s))
    return [
        f"{', '.join(map(str, values))} µm: S = {rising} − {falling} = {s}",
        f"p = {beyond} of {every} orders = {beyond / every:.4f}",
    ]


def _check(given: Given) -> list[str]:
    body = given["body"]
    two, rest = checks.check_characters(body), checks.remainder(body)
    first, second = (checks.ALPHABET.index(letter) for letter in two)
    whole = body + two
    left = int(whole, checks.RADIX) % checks.MODULUS
    return [
        f"{body}00 to base 36 leaves {rest} when divided by {checks.MODULUS}",
        f"(1 − {rest}) modulo {checks.MODULUS} = {first * checks.RADIX + second} "
        f"= {first} × 36 + {second} → {two}",
        f"{whole} leaves {left}",
    ]


WORKERS: Mapping[str, Worker] = {
    "letters_from_logmar": _letters,
    "logmar_from_fraction": _fraction,
    "snapped_line": _snapped,
    "letters_of_a_chart_test": _chart_test,
    "letters_from_100_based": _hundred,
    "mean_acuity": _mean,
    "repeatability": _repeat,
    "mean_arterial_pressure": _map,
    "perfusion_pressure": _perfusion,
    "part_perfusion_pressure": _part_perfusion,
    "colloid_osmotic_pressure": _osmotic,
    "theil_sen": _theil_sen,
    "mann_kendall": _mann_kendall,
    "check_characters": _check,
}


@cache
def formulas() -> dict[str, Formula]:
    """Return every formula by its name, in the order of the file."""
    file = resources.files("trends") / "formulas.toml"
    data = tomllib.loads(file.read_text(encoding="utf-8"))
    return {
        name: Formula(
            name,
            one["title"],
            one["formula"],
            citation(one["cite"]),
            one.get("place", ""),
            one.get("memory", False),
            one.get("note", ""),
            one["example"],
        )
        for name, one in data.items()
    }

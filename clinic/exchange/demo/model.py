r"""One invented eye: how much fluid it holds, what one would read, what a treatment does.

The model is as plain as it can be while looking right. It teaches nothing and predicts nothing;
it exists so that charts rise and fall for a reason.

- **Fluid** ``F`` (µm above the eye's own dry thickness) runs after a target, day by day:
  ``F += (target - F) / tau`` with tau = 24 days while filling and 11 days while emptying.
- **Target** = ``leak * 0.5 ** (day / 900) * (1 - strength * hold(t))``: the drive of this eye,
  fading over years, held back by the last treatment.
- **Drug effect** ``hold(t) = 1 / (1 + exp((t - holds) / 7))``: nearly full until about ``holds``
  days after the treatment (by agent, times a factor of the eye), gone about three weeks later.
- **CST read** = dry + F + the scanner class's offset + noise with a within-eye SD of 7.2 µm (95 %
  repeatability 20 µm).
- **Letters read** = best - 9 per 100 µm of fluid - a slow loss + noise with SD 2.5 letters.
- **Pressure read** = the eye's own level + steroid rise + noise; the rise after a steroid is
  ``height * (t / 60) * exp(1 - t / 60)``, at its highest on day 60.

Numbers and their sources: ``numbers.toml``.
"""

import math
from dataclasses import dataclass, field

import numpy as np

from clinic.exchange.demo.numbers import numbers

THINNEST_UM = 160.0


@dataclass
class InventedEye:
    """One eye's make-up and its state on ``day`` (days since its first visit)."""

    dry_um: float
    leak_um: float
    strength: float
    holds_factor: float
    best_letters: float
    iop_mmhg: float
    steroid_rise_mmhg: float
    shows_srf: bool
    fluid_um: float
    day: int = 0
    treatments: list[tuple[int, str]] = field(default_factory=list)

    def hold(self, day: int) -> float:
        """Return how strongly the last treatment holds the fluid back on a day, 0 to 1."""
        if not self.treatments:
            return 0.0
        given, agent = self.treatments[-1]
        holds = numbers()["agent"][agent]["holds_days"] * self.holds_factor
        return 1.0 / (1.0 + math.exp(min(50.0, (day - given - holds) / 7.0)))

    def live_until(self, day: int) -> None:
        """Let the days pass up to ``day``."""
        fluid = numbers()["fluid"]
        while self.day < day:
            self.day += 1
            drive = self.leak_um * 0.5 ** (self.day / fluid["leak_half_life_days"])
            target = drive * (1.0 - self.strength * self.hold(self.day))
            tau = fluid["rise_days"] if target > self.fluid_um else fluid["fall_days"]
            self.fluid_um += (target - self.fluid_um) / tau

    def treat(self, agent: str) -> None:
        """Give a treatment today."""
        self.treatments.append((self.day, agent))

    def read_cst(self, rng: np.random.Generator, oct_class: str) -> int:
        """Return one CST reading in whole µm on a scanner of this class."""
        table = numbers()["scanner"]
        offset = table[oct_class]["dry_mean_um"] - table["SD-BM"]["dry_mean_um"]
        noise = rng.normal(0.0, numbers()["noise"]["cst_um"])
        return int(round(max(THINNEST_UM, self.dry_um + offset + self.fluid_um + noise)))

    def read_letters(self, rng: np.random.Generator) -> int:
        """Return one letter score, 0 to 100."""
        sight = numbers()["sight"]
        lost = sight["lost_letters_per_100_um"] * self.fluid_um / 100.0
        lost += sight["slow_loss_letters_per_year"] * self.day / 365.0
        score = self.best_letters - lost + rng.normal(0.0, numbers()["noise"]["letters"])
        return int(min(95, max(0, round(score))))

    def read_iop_tenths(self, rng: np.random.Generator) -> int:
        """Return one applanation reading, whole mmHg in tenths."""
        steroids = [given for given, agent in self.treatments if agent == "dexamethasone"]
        rise = 0.0
        if steroids:
            t = (self.day - steroids[-1]) / numbers()["steroid_pressure"]["peak_day"]
            rise = self.steroid_rise_mmhg * t * math.exp(1.0 - t)
        noise = numbers()["noise"]
        spread = math.hypot(noise["iop_mmhg"], noise["iop_day_mmhg"])
        return 10 * max(6, round(self.iop_mmhg + rise + rng.normal(0.0, spread)))

    def is_wet(self) -> bool:
        """Say whether a grader sees fluid today."""
        return bool(self.fluid_um > numbers()["fluid"]["wet_um"])


def invented_eye(rng: np.random.Generator, cause: str, sex: str) -> InventedEye:
    """Draw the make-up of a new, untreated eye of this cause."""
    table = numbers()
    half_gap = table["dry"]["men_more_um"] / 2.0
    dry = table["scanner"]["SD-BM"]["dry_mean_um"] + (half_gap if sex == "m" else -half_gap)
    low, high = table["cause"][cause]["leak_um"]
    leak = float(rng.uniform(low, high))
    return InventedEye(
        dry_um=float(np.clip(rng.normal(dry, table["dry"]["sd_um"]), 225.0, 320.0)),
        leak_um=leak,
        strength=float(rng.uniform(0.82, 0.98)),
        holds_factor=float(np.exp(rng.normal(0.0, 0.25))),
        best_letters=float(np.clip(rng.normal(74.0, 8.0), 50.0, 88.0)),
        iop_mmhg=float(np.clip(rng.normal(15.0, 1.6), 11.5, 18.0)),
        steroid_rise_mmhg=float(rng.uniform(0.0, 3.0)),
        shows_srf=bool(rng.random() < 0.35),
        fluid_um=leak,
    )

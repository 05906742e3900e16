"""Quantities and results as people read them, in the job's own units; the only place where the reckoning becomes text.

Conversion and rounding (half up) happen here and nowhere earlier. A figure that misses its limit is never written equal to
it: it is 'just under' the limit.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from decimal import Decimal
from typing import Final

from fieldapp.reckoning.limits import at_least, at_most, depth_meets, depth_over
from fieldapp.reckoning.rounding import half_up, sixteenths
from fieldapp.reckoning.units import (
    KG_M3_PER_PCF,
    KG_PER_LB,
    M2_PER_FT2,
    M3_PER_BOARD_FOOT,
    MM_PER_INCH,
    NG_PER_PERM,
    RSI_PER_R,
    fahrenheit_from_c,
)

#: The word of a check's result, where it is not the result's own name.
SHORT_WORDS: Final = {"over-depth": "too deep", "deficiencies": "open"}


def count(number: int, noun: str, plural: str | None = None) -> str:
    """A number with its noun: '1 bay', '9 bays', '1,204 points'."""
    return f"{number:,} {noun if number == 1 else plural or noun + 's'}"


def listed(items: Sequence[str]) -> str:
    """'a', 'a and b', 'a, b and c'."""
    return items[0] if len(items) == 1 else f"{', '.join(items[:-1])} and {items[-1]}"


def bay_list(labels: Sequence[str], in_order: Sequence[str]) -> str:
    """Bays by name, runs of three and more drawn together: 'bays 9 to 14, 16 and 20 to 22'.

    Args:
        labels: The bays to name.
        in_order: All bays of the surface in their order, which says what is a run.
    """
    wanted = set(labels)
    runs: list[list[str]] = []
    before = False
    for label in in_order:
        if label in wanted:
            if before:
                runs[-1].append(label)
            else:
                runs.append([label])
        before = label in wanted
    parts: list[str] = []
    for run in runs:
        parts.extend([f"{run[0]} to {run[-1]}"] if len(run) > 2 else run)
    return f"{'bay' if len(wanted) == 1 else 'bays'} {listed(parts)}" if parts else "no bay"


@dataclass(frozen=True, slots=True)
class Wording:
    """Writes quantities in the units of a job, `ip` or `si`."""

    units: str

    @property
    def is_ip(self) -> bool:
        """Inches, R, perms and pounds."""
        return self.units == "ip"

    @property
    def vapor(self) -> str:
        """'vapor' where units are ip, 'vapour' where they are si."""
        return "vapor" if self.is_ip else "vapour"

    @property
    def depth_unit(self) -> str:
        """Unit of depths."""
        return "in" if self.is_ip else "mm"

    def depth_number(self, depth_mm: float) -> str:
        """A depth without its unit: '2 7/8' (to sixteenths of an inch) or '73'."""
        if not self.is_ip:
            return f"{half_up(depth_mm)}"
        whole, part = divmod(abs(sixteenths(depth_mm)), 16)
        sign = "-" if sixteenths(depth_mm) < 0 else ""
        if not part:
            return f"{sign}{whole}"
        below = 16
        while part % 2 == 0:
            part //= 2
            below //= 2
        return f"{sign}{whole} {part}/{below}" if whole else f"{sign}{part}/{below}"

    def depth(self, depth_mm: float) -> str:
        """'2 7/8 in' or '73 mm'."""
        return f"{self.depth_number(depth_mm)} {self.depth_unit}"

    def fine_depth(self, depth_mm: float) -> str:
        """A computed depth or difference to hundredths of an inch or tenths of a millimetre."""
        return f"{half_up(depth_mm / MM_PER_INCH, 2)} in" if self.is_ip else f"{half_up(depth_mm, 1)} mm"

    def signed_depth(self, depth_mm: float) -> str:
        """A difference of depths with its sign: '+0.02 in' or '−1.2 mm'."""
        text = self.fine_depth(abs(depth_mm))
        return f"{'−' if depth_mm < 0.0 else '+'}{text}"

    def depth_held(self, depth_mm: float, limit_mm: float) -> str:
        """A depth held against a least depth; never written equal to a limit that it misses."""
        text = self.depth(depth_mm)
        missed = not depth_meets(depth_mm, limit_mm)
        return f"just under {text}" if missed and text == self.depth(limit_mm) else text

    def depth_held_below(self, depth_mm: float, limit_mm: float) -> str:
        """A depth held against a greatest depth."""
        text = self.depth(depth_mm)
        passed = depth_over(depth_mm, limit_mm)
        return f"just over {text}" if passed and text == self.depth(limit_mm) else text

    def r(self, rsi: float) -> str:
        """'R-23.1' or 'RSI 4.07'."""
        return f"R-{half_up(rsi / RSI_PER_R, 1)}" if self.is_ip else f"RSI {half_up(rsi, 2)}"

    def r_held(self, rsi: float, limit_rsi: float) -> str:
        """A resistance held against a least one."""
        text = self.r(rsi)
        return f"just under {text}" if not at_least(rsi, limit_rsi) and text == self.r(limit_rsi) else text

    def u(self, u_w_m2k: float) -> str:
        """'U-0.045' or 'U 0.256 W/(m²K)'."""
        if self.is_ip:
            return f"U-{half_up(u_w_m2k * RSI_PER_R, 3)}"
        return f"U {half_up(u_w_m2k, 3)} W/(m²K)"

    def area(self, area_m2: float) -> str:
        """'412 ft²' or '38.3 m²'."""
        return f"{half_up(area_m2 / M2_PER_FT2):,} ft²" if self.is_ip else f"{half_up(area_m2, 1):,} m²"

    def foam(self, volume_m3: float) -> str:
        """A volume of foam: '38 board feet', '2.4 board feet' or '90 litres'."""
        value = volume_m3 / M3_PER_BOARD_FOOT if self.is_ip else volume_m3 * 1000.0
        noun = "board feet" if self.is_ip else "litres"
        if 0.0 < value < 0.05:
            return f"under 0.1 {noun}"
        return f"{_two_figures(value):,} {noun}"

    def permeance(self, permeance_ng: float) -> str:
        """'0.87 perm' or '50 ng/(Pa s m²)'."""
        if self.is_ip:
            return f"{half_up(permeance_ng / NG_PER_PERM, 2)} perm"
        return f"{half_up(permeance_ng, 1)} ng/(Pa s m²)"

    def permeance_held(self, permeance_ng: float, limit_ng: float) -> str:
        """A permeance held against a greatest one."""
        text = self.permeance(permeance_ng)
        missed = not at_most(permeance_ng, limit_ng)
        return f"just over {text}" if missed and text == self.permeance(limit_ng) else text

    def density(self, kg_m3: float) -> str:
        """'2.10 pcf' or '33.7 kg/m³'."""
        return f"{half_up(kg_m3 / KG_M3_PER_PCF, 2)} pcf" if self.is_ip else f"{half_up(kg_m3, 1)} kg/m³"

    def plus_minus(self, kg_m3: float) -> str:
        """How far a density can be off, to one more place where it would read as nothing: '± 0.02 pcf'."""
        value, unit = (kg_m3 / KG_M3_PER_PCF, "pcf") if self.is_ip else (kg_m3, "kg/m³")
        places = 2 if self.is_ip else 1
        while places < 5 and half_up(value, places).is_zero() and value > 0.0:
            places += 1
        return f"± {half_up(value, places)} {unit}"

    def mass(self, mass_kg: float) -> str:
        """'12 lb' or '5.4 kg'."""
        return f"{_two_figures(mass_kg / KG_PER_LB)} lb" if self.is_ip else f"{_two_figures(mass_kg)} kg"

    def temperature(self, temperature_c: float) -> str:
        """'50 °F' or '10 °C'."""
        return f"{half_up(fahrenheit_from_c(temperature_c))} °F" if self.is_ip else f"{half_up(temperature_c)} °C"

    def percent(self, share: float) -> str:
        """'8 %'; what is more than nothing is never written as nothing, nor less than all as all."""
        if 0.0 < share < 0.005:
            return "under 1 %"
        if 0.995 <= share < 1.0:
            return "over 99 %"
        return f"{half_up(share * 100.0)} %"

    def percent_held(self, share: float, limit: float) -> str:
        """A share held against a greatest one; near nothing and near all, to more places instead of 'just over'."""
        text = self.percent(share)
        if at_most(share, limit) or text != self.percent(limit):
            return text
        if text[0].isdigit():
            return f"just over {text}"
        places = 1
        while places < 6 and half_up(share * 100.0, places) == half_up(limit * 100.0, places):
            places += 1
        return f"{half_up(share * 100.0, places)} %"

    def density_held(self, kg_m3: float, low: float | None, high: float | None) -> str:
        """A density held against its limits."""
        text = self.density(kg_m3)
        if low is not None and not at_least(kg_m3, low) and text == self.density(low):
            return f"just under {text}"
        if high is not None and not at_most(kg_m3, high) and text == self.density(high):
            return f"just over {text}"
        return text


def _two_figures(value: float) -> Decimal:
    """Whole from 10 upwards, one decimal below."""
    whole = half_up(value)
    return whole if whole >= 10 else half_up(value, 1)

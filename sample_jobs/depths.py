"""Depths as sprayed foam lies: thick in the middle of a bay, thin at framing, ends and obstructions, drifting along a surface.

Every irregularity is a sum of a few slow waves with phases from a seed, so that neighbours are alike: not noise.
"""

from dataclasses import dataclass
from math import exp, pi, sin
from random import Random


@dataclass(frozen=True)
class Foam:
    """How a surface was sprayed; all in mm but the seed.

    `drift` is what a gun that warms up adds from the first bay to the last, `crown` how much deeper mid-bay is than at the
    framing, `reach` how much is lost at the end that is hard to reach, `hand` how unsteady the hand is.
    """

    mean_mm: float
    seed: int
    drift_mm: float = 4.0
    crown_mm: float = 8.0
    reach_mm: float = 0.0
    hand_mm: float = 5.0

    def depth_mm(self, bay: int, bays: int, across: float, down: float) -> float:
        """Depth in a bay (0, 1, ...) at a place across (0..1) and down (0..1) it. [mm]"""
        along = bay / max(bays - 1, 1)
        depth = self.mean_mm + self.drift_mm * (along - 0.5)
        depth += self.crown_mm * (float(sin(pi * across) ** 0.7) - 0.75)
        depth -= self.reach_mm * exp(-5.0 * down)
        depth -= 0.5 * self.crown_mm * exp(-14.0 * (1.0 - down))
        return depth + self.hand_mm * self._unsteady(bay + across, down)

    def _unsteady(self, along: float, down: float) -> float:
        """A slow wave along the surface, and one in each bay that follows from its neighbours'."""
        phases = Random(self.seed)
        total = 0.0
        for length, share in ((11.0, 0.5), (5.3, 0.45), (2.4, 0.35)):
            turn, tilt = phases.random() * 2 * pi, phases.uniform(0.6, 2.2)
            total += share * sin(2 * pi * along / length + tilt * 2 * pi * down / 2.5 + turn)
        return total

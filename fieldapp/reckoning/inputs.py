"""What the reckoning works on: a job as counted, that is, with one depth or none at each point.

Which reading counts at a point (rounds, withdrawals, lowest of several) is settled before, where records are folded.
Optional figures are None where nobody gave them; nothing here is guessed.
"""

from collections.abc import Mapping
from dataclasses import dataclass

from fieldapp.reckoning.resistance import Resistance


@dataclass(frozen=True, slots=True)
class Foam:
    """A foam with the values of its data sheet."""

    key: str
    name: str
    cell: str
    resistance: Resistance
    permeability_ng_m: float | None = None
    density_nominal_kg_m3: float | None = None
    density_min_kg_m3: float | None = None
    density_max_kg_m3: float | None = None
    max_pass_mm: float | None = None
    min_pass_mm: float | None = None
    pass_wait_min: float | None = None
    max_depth_mm: float | None = None
    reentry_h: float | None = None
    loss_share: float | None = None
    source: str | None = None

    @property
    def is_closed(self) -> bool:
        """Closed cell; open cell retards no vapour at any depth."""
        return self.cell == "closed"


@dataclass(frozen=True, slots=True)
class Spec:
    """What the contract asks of a surface."""

    depth_mm: float
    basis: str | None = None
    floor_mm: float | None = None
    rsi: float | None = None
    r_basis: str = "delivered"
    under_area_share_max: float | None = None
    bays_share_min: float = 1.0
    cores_min: int = 0

    @property
    def single_point_mm(self) -> float:
        """The least depth that the basis asks of a single point; 0 where it asks only a mean. [mm]"""
        if self.basis == "average":
            return 0.0
        return self.floor_mm or 0.0 if self.basis == "average-with-floor" else self.depth_mm

    @property
    def asks_mean(self) -> bool:
        """True where the basis asks a mean depth."""
        return self.basis in ("average", "average-with-floor")


@dataclass(frozen=True, slots=True)
class Vapour:
    """The vapour rule of a surface."""

    rule: str
    depth_mm: float | None = None
    measure: str = "lowest"
    by_sample: bool = False
    perm_ng: float | None = None
    retarder_name: str | None = None
    retarder_perm_ng: float | None = None
    retarder_side: str | None = None
    reason: str | None = None
    accepted_by: str | None = None


@dataclass(frozen=True, slots=True)
class Framing:
    """Framing between the bays."""

    material: str
    spacing_mm: float | None = None
    depth_mm: float | None = None
    share: float | None = None


@dataclass(frozen=True, slots=True)
class Layer:
    """A layer of the assembly other than the foam."""

    name: str
    rsi: float | None = None
    is_foam: bool = False


@dataclass(frozen=True, slots=True)
class Core:
    """A core sample as weighed and measured; `sizes_mm` pairs each length with its power in the volume."""

    record: str
    bay: str
    bay_label: str
    label: str
    mass_g: float
    volume_m3: float
    sizes_mm: tuple[tuple[float, int], ...] = ()
    scale_step_g: float | None = None
    calliper_step_mm: float | None = None
    with_skin: bool = False


@dataclass(frozen=True, slots=True)
class CountedBay:
    """A bay with the depth that counts at each point, row by row from the top, left to right.

    `depths_mm[i]` is None where point i is unread or blocked; `blocked[i]` says why it is blocked. Low spots have no area.
    """

    key: str
    label: str
    rows: int
    cols: int
    area_m2: float
    depths_mm: tuple[float | None, ...]
    areas_m2: tuple[float, ...]
    blocked: Mapping[int, str]
    low_spots_mm: tuple[float, ...] = ()
    round: int = 1
    waiting: bool = False
    disagreeing: int = 0
    read_again: int = 0


@dataclass(frozen=True, slots=True)
class Deficiencies:
    """How many deficiencies of severity stop or repair stand in which state."""

    open: int = 0
    repaired: int = 0
    accepted: int = 0


@dataclass(frozen=True, slots=True)
class CountedSurface:
    """A surface with its foam, specification and counted bays in order."""

    key: str
    name: str
    assembly: str
    foam: Foam | None
    bays_total_stated: int
    spec: Spec
    vapour: Vapour
    bays: tuple[CountedBay, ...]
    place: str | None = None
    chosen: str | None = None
    cores: tuple[Core, ...] = ()
    deficiencies: Deficiencies = Deficiencies()
    max_depth_mm: float | None = None
    film_in_rsi: float | None = None
    film_out_rsi: float | None = None
    framing: Framing | None = None
    layers: tuple[Layer, ...] = ()


@dataclass(frozen=True, slots=True)
class Place:
    """A unit, floor or phase that is reported by itself."""

    key: str
    name: str


@dataclass(frozen=True, slots=True)
class CountedJob:
    """A job as counted for one purpose.

    `pair_differences_mm` holds inspection less self-check at each point read for both in the same round.
    """

    key: str
    name: str
    units: str
    purpose: str
    surfaces: tuple[CountedSurface, ...]
    places: tuple[Place, ...] = ()
    climate_zone: str | None = None
    pair_differences_mm: tuple[float, ...] = ()

"""A metric job with accents in its names."""

from datetime import UTC, datetime

from sample_jobs import pictures
from sample_jobs.depths import Foam
from sample_jobs.layout import STATEMENT, TABLED, Bays, begin, foam, lay_out, read_all, surface
from sample_jobs.writer import Writer, millimetres


def riviere_basement() -> Writer:
    """A metric rim and foundation, foam with a table, everything meets; one rule by depth, one by permeance."""
    job = begin(
        "riviere-basement",
        datetime(2026, 4, 14, 14, 0, tzinfo=UTC),
        "Maison de la Rivière, sous-sol",
        "si",
        site="Lieu inventé, chemin de la Rivière",
        client="Entrepreneur général de démonstration",
        engaged_by="Propriétaire de démonstration",
        contractor="Équipe démo 3",
        tz="America/Toronto",
        climate_zone="7",
        project_no="MR-7",
        code="édition de démonstration",
    )
    c = foam(job, TABLED)
    rim_bays = Bays(18, 370.0, 240.0, 1, 2)
    rim = surface(
        job,
        "Solive de rive",
        "rim",
        c,
        18,
        spec={"depth_mm": 75.0, "basis": "minimum", "rsi": 2.9},
        vapour={"rule": "depth", "depth_mm": 75.0},
        numbered_from="le coin nord-est",
    )
    rim_keys = lay_out(job, rim, rim_bays, [f"R{number}" for number in range(1, 19)])
    wall_bays = Bays(
        12, 1200.0, 2100.0, 3, 3, {"rows_at_mm": [200.0, 1050.0, 1900.0], "cols_at_mm": [150.0, 600.0, 1050.0]}
    )
    wall = surface(
        job,
        "Mur de fondation",
        "foundation",
        c,
        12,
        spec={"depth_mm": 60.0, "basis": "minimum", "rsi": 2.3, "cores_min": 2},
        vapour={"rule": "permeance", "perm_ng": 60.0},
        substrate="béton coulé",
        cover={"kind": "gypsum", "product": "plaque 12,7 mm"},
        framing={"material": "none"},
        layers=[
            {"name": "plaque de plâtre 12,7 mm", "rsi": 0.08},
            {"foam": True},
            {"name": "béton 200 mm", "rsi": 0.1},
        ],
    )
    wall_keys = lay_out(job, wall, wall_bays, [f"F{number}" for number in range(1, 13)])
    job.device = job.inspector
    rim_read = read_all(job, rim_keys, rim_bays, Foam(85.0, 31, drift_mm=3.0, crown_mm=6.0, hand_mm=6.0))
    read_all(job, wall_keys, wall_bays, Foam(74.0, 33, drift_mm=-3.0, crown_mm=7.0, reach_mm=3.0, hand_mm=7.0))
    for number, (bay, mass) in enumerate(((1, 8.05), (8, 8.31)), 1):
        job.write(
            "core",
            bay=wall_keys[bay],
            label=f"F-{number}",
            method="prism",
            width_mm=60.0,
            length_mm=70.0,
            depth_mm=59.0,
            mass_g=mass,
            scale_step_g=0.05,
            calliper_step_mm=0.5,
            skin="without",
        )
    job.write("pull", bay=wall_keys[4], kpa=210.0, broke="in-foam", note="plaque collée de 50 mm")
    job.photo(
        pictures.probe(millimetres(rim_read[3, 0, 0][1]), "probe in the rim", 17, metric=True),
        bay=rim_keys[3],
        row=0,
        col=0,
        about=rim_read[3, 0, 0][0],
        shows="probe-scale",
        caption="Solive de rive, case R4",
    )
    job.sign("inspector", "Demo inspector C", STATEMENT)
    return job

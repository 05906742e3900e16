"""The sample jobs are whole, and reckon to what their README says of them."""

import json
from collections import Counter
from hashlib import sha256
from itertools import pairwise

import pytest
from PIL import Image

from tests.sheets import ROOT, SAMPLES, sample

#: By the design of each job; see sample_jobs/README.md.
RESULTS = {
    "tamarack-yard": {"North slope": "short", "Rim": "meets", "Knee wall": "unproven"},
    "hollow-road-walls": {"South wall": "short"},
    "riviere-basement": {"Solive de rive": "meets", "Mur de fondation": "meets"},
    "larch-hall-floor": {"Floor": "short"},
    "workbench-garage": {"Ceiling slope": "meets"},
    "quarry-lane-before": {"East wall": "unproven"},
}


@pytest.mark.parametrize("name", SAMPLES)
def test_no_record_of_a_sample_job_is_refused(name: str) -> None:
    assert sample(name).refused == ()


@pytest.mark.parametrize("name", RESULTS)
def test_a_sample_job_reckons_to_what_it_was_made_to_show(name: str) -> None:
    assert {surface.name: surface.result for surface in sample(name).result.surfaces} == RESULTS[name]


def test_of_twelve_units_one_is_short_and_one_unproven() -> None:
    places = Counter(place.result for place in sample("alder-court-units").result.places)
    assert places == {"meets": 10, "short": 1, "unproven": 1}


def test_bases_of_all_sorts_occur() -> None:
    bases = {s.spec.basis for name in SAMPLES for s in sample(name).counted.reckoned.surfaces}
    assert bases == {"minimum", "average-with-floor", "average", None}


def test_touch_up_of_the_slope_left_a_bay_short_a_low_spot_short_and_one_waiting() -> None:
    slope = sample("tamarack-yard").result.surfaces[0]
    again = [bay for bay in slope.bays if bay.round == 2]
    assert [(bay.label, bay.low_spot_mm is not None) for bay in again if bay.result == "short"] == [
        ("24", True),
        ("25", False),
    ]
    assert [bay.label for bay in slope.bays if bay.waiting_for_reading] == ["27"]
    assert sample("tamarack-yard").result.agreement is not None


@pytest.mark.parametrize("name", SAMPLES)
def test_every_photo_lies_beside_its_job_and_is_what_the_record_says(name: str) -> None:
    folder = ROOT / "sample_jobs" / name
    photos = {record.body["sha256"]: record.body for record in sample(name).job.of("photo")}
    assert {path.stem for path in folder.glob("*")} == set(photos)
    for digest, body in photos.items():
        content = (folder / f"{digest}.jpg").read_bytes()
        assert sha256(content).hexdigest() == digest
        assert len(content) == body["bytes"]
        with Image.open(folder / f"{digest}.jpg") as picture:
            assert picture.size == (body["width"], body["height"])
            assert not picture.getexif()


@pytest.mark.parametrize("name", SAMPLES)
def test_every_device_counts_its_records_without_a_gap_and_its_time_never_turns_back(name: str) -> None:
    records = [json.loads(line) for line in (ROOT / "sample_jobs" / f"{name}.jsonl").read_text().splitlines()]
    for device in {record["device"] for record in records}:
        own = [record for record in records if record["device"] == device]
        assert [record["n"] for record in own] == list(range(1, len(own) + 1))
        assert [record["at"] for record in own] == sorted(record["at"] for record in own)


@pytest.mark.parametrize("name", SAMPLES)
def test_depths_lie_as_foam_does_neighbours_are_more_alike_than_strangers(name: str) -> None:
    # Common practice, no source: a gun passes bay after bay, so depths of neighbouring bays go together; noise would not.
    for surface in sample(name).counted.reckoned.surfaces:
        means = [
            sum(d for d in b.depths_mm if d is not None) / len(b.depths_mm)
            for b in surface.bays
            if None not in b.depths_mm
        ]
        if len(means) < 12:
            continue
        middle = sum(means) / len(means)
        spread = sum((mean - middle) ** 2 for mean in means) / (len(means) - 1)
        steps = sum((a - b) ** 2 for a, b in pairwise(means)) / (2 * (len(means) - 1))
        assert steps < spread

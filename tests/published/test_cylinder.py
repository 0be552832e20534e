"""Flow past a cylinder in a channel at Re 20, against the reference values."""

import pytest
from flow_tools import reference
from verified import rows

ENTRIES = {entry["quantity"]: entry["value"] for entry in reference("cylinder_channel_re20")["values"]}
NAMES = {"Cd": "drag coefficient", "Cl": "lift coefficient", "dp": "pressure difference, Pa", "La": "length of the eddy, m"}


@pytest.mark.slow
@pytest.mark.parametrize(
    ("entry", "allowed"),
    [
        ("drag coefficient Cd", 1e-4),
        ("lift coefficient Cl", 1e-2),
        ("pressure difference dp", 1e-4),
        ("recirculation length La (u = 0 on y = 0.2 behind the cylinder)", 1e-4),  # the reference is good to 1e-6
    ],
)
def test_against_the_reference(entry, allowed):
    row = rows("cylinder")[NAMES[entry.split(" (")[0].split()[-1]]]
    assert row.published == ENTRIES[entry]
    assert row.computed == pytest.approx(ENTRIES[entry], rel=allowed)
    assert row.tolerance <= allowed


@pytest.mark.slow
@pytest.mark.parametrize("short", ["Cd", "Cl", "dp", "La"])
def test_within_the_published_interval(short):
    low, high = ENTRIES[f"published interval for {short}"]
    assert low <= rows("cylinder")[NAMES[short]].computed <= high

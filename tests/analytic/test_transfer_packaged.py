"""On the shipped networks transfer functions and the path search agree to rounding."""

from __future__ import annotations

import numpy as np
import pytest
from numpy.testing import assert_allclose

from waveguide.constants import SECONDS_PER_DAY
from waveguide.network.packaged import family_of, packaged_network
from waveguide.ocean.bathymetry import packaged_bathymetry
from waveguide.propagation.arrivals import mode_arrivals
from waveguide.propagation.modes import atlas_mode
from waveguide.propagation.step_response import Conditions
from waveguide.propagation.transfer import leg_budget, paths_of_arrival, route_transfers

# Ways that hold straits, facing coasts, both junctions, leaning coasts and both sides of an ocean.
CASES = [
    (1, 40.0, (126.7, 8.6), [(-157.5, 2.0), (-77.2, -12.1), (-122.4, 37.8)]),
    (2, 60.0, (165.0, 0.0), [(-90.3, -0.8), (-71.6, -33.0)]),
    (1, 25.0, (-36.9, -11.2), [(-40.8, -2.1), (9.0, 0.5), (11.5, -5.1), (3.5, 6.1)]),
    (0, 5.0, (-65.0, -45.0), [(-38.5, -13.0), (13.2, -8.8), (-5.5, 50.1)]),
]


@pytest.mark.parametrize(("number", "days", "source", "targets"), CASES)
def test_amplitude_time_and_budget(
    number: int, days: float, source: tuple[float, float], targets: list[tuple[float, float]]
) -> None:
    network, atlas = packaged_network(family_of(number))
    mode = atlas_mode(atlas, number)
    omega = 2.0 * np.pi / (days * SECONDS_PER_DAY)
    arrivals = mode_arrivals(
        network, mode, packaged_bathymetry(), (*source, *source), source, targets, omega
    )
    routes = [route for arrival in arrivals for route in arrival.routes]
    paths = [path for arrival in arrivals for path in paths_of_arrival(arrival)]
    assert len(routes) >= len(targets)
    frequencies = omega * np.array([0.0, 0.2, 1.0, 3.0])
    transfers = route_transfers(network, mode, paths, frequencies)
    # not exact only because sums are taken in another order
    found = [abs(transfer.response[2]) for transfer in transfers]
    assert_allclose(found, [route.amplitude for route in routes], rtol=1e-9)
    times = [transfer.front_time for transfer in transfers]
    assert_allclose(times, [route.time for route in routes], rtol=1e-9)
    at_work = Conditions(friction=1e-9, damping=1e-8, mean_flow=0.02, overlap=0.9999)
    for transfer in (*transfers, *route_transfers(network, mode, paths, frequencies, at_work)):
        assert np.isfinite(transfer.response).all()
        budget = leg_budget(transfer, np.ones(frequencies.size))
        assert_allclose(budget.arrives[-1] + budget.taken.sum(), 1.0, rtol=1e-9)

"""RMS torque and winding heating (reference 12.03; derived, thermal time constant read in a stored thesis)."""

from math import exp, inf

import pytest

from balance.maths.windings import COPPER, overload_time, rise, rms


def test_rms_and_heating():
    assert rms([(0.2, 0.8), (0.5, 0.2), (0.3, -0.6), (1.0, 0.0)]) == pytest.approx(0.357771, rel=1e-5)
    assert overload_time(2.0, 17.7) == pytest.approx(5.09197, rel=1e-5)
    assert overload_time(2.0, 1.0) == pytest.approx(0.287682, rel=1e-5)
    assert rise(4.0, 1.03, 5.0) == pytest.approx(82.4, rel=1e-6)
    assert rise(4.0, 1.03, 5.0) * (1 - exp(-1)) == pytest.approx(52.0867, rel=1e-5)
    assert rise(4.0, 1.03, 5.0, COPPER) == pytest.approx(121.863, rel=1e-5)


def test_what_never_and_what_always_holds():
    assert overload_time(1.0, 17.7) == inf                      # nominal current is borne for ever
    assert rise(8.0, 1.03, 5.0, COPPER) == inf                  # copper's growth outruns the cooling
    assert rise(8.0, 1.03, 5.0) < inf

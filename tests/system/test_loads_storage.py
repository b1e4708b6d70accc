import numpy as np
import pytest
from numpy.testing import assert_allclose
from pydantic import ValidationError

from tegdesign.system.load import Battery
from tegdesign.system.storage import Duty


def duty(**more):
    basis = {"burst_power": "2 W", "burst_time": "6 s", "period": "60 s", "rest_power": "0.1 W"}
    return Duty(**{**basis, "storage_efficiency": 0.8, "storage_leak": "0.02 W", **more})


def played(own, power, time, content, capacity=np.inf, step=0.05):
    """Return the content [J] over time, second by second from the start of a burst: an account of its own."""
    clock = np.arange(0, time, step)
    drawn = np.where(clock % own.period < own.burst_time - 1e-9, own.burst_power, own.rest_power)
    held = [content]
    for fed, user in zip(np.broadcast_to(power, clock.shape), drawn, strict=True):
        rate = (fed - user) * (own.storage_efficiency if fed > user else 1.0) - own.storage_leak
        held.append(min(held[-1] + rate * step, capacity))
    return np.array(held)


def test_average_by_hand():
    assert_allclose(duty().average_power, 0.1 * 2 + 0.9 * 0.1, rtol=1e-14)


@pytest.mark.parametrize("power", [-0.05, 0.0, 0.05, 0.1, 0.3, 1.0, 2.0, 5.0])
def test_net_power_against_an_account(power):
    held = played(duty(), power, 600, 0.0)
    assert_allclose(duty().net_power(power), held[-1] / 600, rtol=1e-9)


def test_break_even_by_hand():
    # 0.1 (2 - P) + 0.02 = 0.8 * 0.9 (P - 0.1)
    assert_allclose(duty().break_even_power, (0.2 + 0.02 + 0.072) / (0.1 + 0.72), rtol=1e-13)


@pytest.mark.parametrize(
    "own",
    [duty(), duty(storage_leak="5 W"), duty(storage_efficiency=1.0), duty(rest_power="2 W"), duty(burst_time="60 s")],
)
def test_break_even_sustains_and_less_does_not(own):
    p = own.break_even_power
    assert_allclose(own.net_power(p), 0, atol=1e-13)
    assert own.net_power(0.999 * p) < 0 < own.net_power(1.001 * p)


def test_perfect_storage_breaks_even_at_average_and_leak():
    assert_allclose(duty(storage_efficiency=1.0).break_even_power, 0.29 + 0.02, rtol=1e-13)


@pytest.mark.parametrize("power", [0.0, 0.2, 0.4, 3.0])
def test_storage_needed_carries_just_through(power):
    """The worst stretch begins and ends with a burst."""
    own = duty()
    need = float(own.storage_needed(power, 606.0))
    held = played(own, power, 606.0, need, capacity=need)
    assert_allclose(held.min(), 0 if need else held[0], atol=1e-9 * max(need, 1.0))


def test_bridge_by_hand():
    # 14 h of 0.29 W and 0.02 W leak, and what one burst draws beyond that
    own = duty(bridge_time="14 h")
    assert_allclose(own.bridge_storage, 0.31 * 14 * 3600 + 6 * (2.02 - 0.31), rtol=1e-13)
    assert_allclose(duty().bridge_storage, 6 * (2.02 - 0.31), rtol=1e-13)  # a burst always


def test_day_of_a_stove():
    """Two burns a day; the fall runs over midnight from the evening burn to the morning one."""
    own = duty()
    hours = np.array([6, 2, 8, 4, 4.0])
    fed = np.array([0.0, 1.5, 0.0, 1.2, 0.0])
    day = own.balance(fed, 3600 * hours)
    n = own.net_power(fed)
    assert_allclose(day.fed, 3600 * (1.5 * 2 + 1.2 * 4), rtol=1e-13)
    assert_allclose(day.used, 0.29 * 86400, rtol=1e-13)
    assert_allclose(day.gained, 3600 * np.sum(n * hours), rtol=1e-12)
    assert_allclose(day.time_short, 18 * 3600, rtol=1e-13)
    assert not day.sustained
    assert day.storage == np.inf

    more = own.balance(2 * fed, 3600 * hours)
    assert more.sustained
    # deepest fall: 4 h of the night and 6 h of the morning, 0.31 W; and a burst beyond it
    assert_allclose(more.storage, 0.31 * 10 * 3600 + 6 * (2.02 - 0.31), rtol=1e-12)


def test_balance_covers_the_account_of_two_days():
    own = duty(period="30 s", burst_time="3 s")
    hours = np.array([1.0, 2.0, 0.5]) / 10  # a short day keeps the account short
    fed = np.array([0.9, 0.1, 0.4])
    day = own.balance(fed, 3600 * hours)
    assert day.sustained
    power = np.tile(np.repeat(fed, np.round(hours * 3600 / 0.05).astype(int)), 2)
    held = played(own, power, power.size * 0.05 - 1e-6, day.storage, capacity=day.storage)
    assert held.min() >= 0
    assert held.min() < 6 * 2.02  # at most about a burst too much


def test_steady_feed():
    day = duty().balance(1.0, 86400)
    assert_allclose(day.gained, 86400 * duty().net_power(1.0), rtol=1e-13)
    assert_allclose(day.storage, 6 * (1.0 + 0.02), rtol=1e-12)
    assert day.time_short == 0


def test_behind_a_battery():
    own = Battery(voltage="3.3 V", duty=duty())
    assert own.duty.break_even_power == duty().break_even_power
    assert "0.29 W on average" in own.words()
    assert Battery.model_validate(own.model_dump()) == own


@pytest.mark.parametrize(
    ("more", "words"),
    [
        ({"burst_time": "61 s"}, ["61 s", "longer", "60 s"]),
        ({"rest_power": "3 W"}, ["3 W", "above", "2 W"]),
        ({"storage_efficiency": 1.1}, ["less than or equal to 1"]),
        ({"burst_power": "0 W"}, ["greater than 0"]),
    ],
)
def test_impossible_duties(more, words):
    with pytest.raises(ValidationError) as error:
        duty(**more)
    assert error.value.error_count() == 1
    for word in words:
        assert word in str(error.value)

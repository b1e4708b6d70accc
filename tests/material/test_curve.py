import numpy as np
import pytest
from numpy.testing import assert_allclose, assert_array_equal
from scipy.interpolate import PchipInterpolator

from tegdesign.errors import InputError
from tegdesign.material.curve import Curve


def curves():
    rng = np.random.default_rng(7)
    for size in (2, 3, 4, 5, 9, 20):
        t = 300 + np.cumsum(rng.uniform(5, 100, size))
        yield t, rng.uniform(-3, 3, size)  # turns at nearly every point
        yield t, np.sort(rng.uniform(1, 2, size))  # monotone
        yield t, np.repeat(1.7, size)  # flat
    yield (
        np.array([300.0, 400, 500, 510]),
        np.array([0.0, 0.0, 1.0, 0.9]),
    )  # end slopes limited in size and sign


# Outside reference: scipy.interpolate.PchipInterpolator, which has the same slopes by its own code.
@pytest.mark.parametrize(("t", "y"), list(curves()))
def test_value_and_integral_equal_those_of_scipy(t, y):
    curve, reference = Curve(t, y), PchipInterpolator(t, y)
    fine = np.linspace(t[0], t[-1], 301)
    scale = np.max(np.abs(y))
    assert_allclose(curve(fine), reference(fine), rtol=1e-13, atol=1e-13 * scale)
    integral = reference.antiderivative()
    assert_allclose(
        curve.integral(fine), integral(fine) - integral(t[0]), rtol=1e-13, atol=1e-13 * scale * (t[-1] - t[0])
    )


def test_passes_through_its_points_and_does_not_overshoot():
    t, y = np.array([300.0, 350, 500, 520, 700]), np.array([1.0, 1.0, 4.0, 4.2, 0.5])
    curve = Curve(t, y)
    assert_allclose(curve(t), y, rtol=1e-15)
    fine = curve(np.linspace(300, 700, 999))
    assert fine.max() <= 4.2
    assert fine.min() >= 0.5


def test_ends_are_held_and_the_integral_knows_it():
    curve = Curve(np.array([300.0, 400, 500]), np.array([2.0, 3.0, 5.0]))
    assert_array_equal(curve([200, 250, 600]), [2, 2, 5])
    assert_allclose(curve.integral(200), -100 * 2.0, rtol=1e-15)
    assert_allclose(curve.integral(600) - curve.integral(500), 100 * 5.0, rtol=1e-15)


def test_shapes_of_the_question_are_kept():
    curve = Curve(np.array([300.0, 400]), np.array([2.0, 3.0]))
    assert curve(350).shape == ()
    assert curve(np.full((3, 1, 2), 350.0)).shape == (3, 1, 2)
    assert curve.integral(np.full((3, 1, 2), 350.0)).shape == (3, 1, 2)


@pytest.mark.parametrize(
    ("t", "y", "words"),
    [
        ([300], [1], "two or more points, got 1"),
        ([300, 400], [1, 2, 3], "two or more points"),
        ([300, 400], [1, np.nan], "not finite"),
        ([300, np.inf], [1, 2], "not finite"),
        ([300, 300, 400], [1, 2, 3], "300 K is followed by 300 K"),
        ([300, 400, 350], [1, 2, 3], "400 K is followed by 350 K"),
    ],
)
def test_lists_that_are_no_function_are_refused(t, y, words):
    with pytest.raises(InputError, match=words):
        Curve(np.array(t, dtype=float), np.array(y, dtype=float))


def test_arguments_are_neither_kept_nor_changed():
    t, y = np.array([300.0, 400]), np.array([2.0, 3.0])
    curve = Curve(t, y)
    t[0] = 0.0
    assert curve.range == (300.0, 400.0)
    with pytest.raises(ValueError, match="read-only"):
        curve.value[0] = 1.0

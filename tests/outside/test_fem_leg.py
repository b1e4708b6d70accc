"""Legs, electrodes and plates against finite elements (scikit-fem), assembled here from the field equations."""

import numpy as np
import pytest
from numpy.testing import assert_allclose
from skfem import (
    Basis,
    BilinearForm,
    ElementHex2,
    ElementQuad2,
    FacetBasis,
    LinearForm,
    MeshHex,
    MeshQuad,
    condense,
    solve,
)
from skfem.helpers import dot, grad

from tegdesign.leg.exact import solve_leg
from tegdesign.material import library
from tegdesign.module.electrode import path_over_section
from tegdesign.module.spreading import spreading_resistance


@BilinearForm
def conduction(u, v, w):
    return w.k * dot(grad(u), grad(v))


@LinearForm
def source_of_flux(v, w):
    return w.qx * grad(v)[0] + w.qy * grad(v)[1]


@LinearForm
def source(v, w):
    return w.f * v


def thermoelectric_leg(material, hot, cold, length, width, voltage):
    """Return current density [A/m^2], heat flux in at the hot end and out at the cold end [W/m^2] of a 2-D leg.

    div J = 0, J = -(grad phi + S grad T)/rho; div q = -J grad phi, q = S T J - kappa grad T; phi falls by
    ``voltage`` from the hot to the cold end. Biquadratic elements on a distorted mesh, potential and temperature
    solved in turn until nothing moves.
    """
    mesh = MeshQuad.init_tensor(np.linspace(0, 1, 91), np.linspace(0, 1, 4))
    x, y = mesh.p
    x = x + 0.004 * np.sin(np.pi * x) * np.cos(3 * np.pi * y)  # lines of nodes are no lines of equal temperature
    mesh = MeshQuad(np.stack([x * length, y * width]), mesh.t)
    basis = Basis(mesh, ElementQuad2(), intorder=6)
    ends = [basis.get_dofs(lambda p: p[0] < 1e-9 * length).flatten()]
    ends.append(basis.get_dofs(lambda p: p[0] > length * (1 - 1e-9)).flatten())
    fixed = np.concatenate(ends)
    place = basis.doflocs[0] / length
    t, phi = hot + (cold - hot) * place, -voltage * place
    for _ in range(60):
        old = t.copy()
        field = basis.interpolate(t)
        s, rho, kappa = (
            c(np.asarray(field))
            for c in (material.seebeck_coefficient, material.resistivity, material.thermal_conductivity)
        )
        flux = -s / rho * field.grad
        load = source_of_flux.assemble(basis, qx=flux[0], qy=flux[1])
        matrix = conduction.assemble(basis, k=1 / rho)
        phi = solve(*condense(matrix, load, x=phi, D=fixed))
        potential = basis.interpolate(phi).grad
        current = -(potential + s * field.grad) / rho
        carried = s * np.asarray(field) * current
        work = -(current[0] * potential[0] + current[1] * potential[1])
        load = source_of_flux.assemble(basis, qx=carried[0], qy=carried[1]) + source.assemble(basis, f=work)
        matrix = conduction.assemble(basis, k=kappa)
        t = solve(*condense(matrix, load, x=t, D=fixed))
        if np.max(np.abs(t - old)) < 1e-9 * hot:
            break
    else:
        raise AssertionError("not settled")
    out = matrix @ t - load  # heat entering through the fixed nodes
    unit = np.zeros(basis.N)
    unit[ends[1]] = 1.0
    drawn = source_of_flux.assemble(basis, qx=current[0], qy=current[1]) @ unit
    return drawn / width, out[ends[0]].sum() / width, -out[ends[1]].sum() / width


@pytest.mark.parametrize(
    ("name", "hot", "cold", "share"),
    [
        ("skutterudite-p", 780.0, 320.0, 0.5),
        ("bismuth-telluride-n-se0.3", 550.0, 330.0, 0.3),
        ("lead-telluride-p", 850.0, 340.0, 0.6),
    ],
)
def test_leg_by_finite_elements(name, hot, cold, share):
    # asked 1e-4, found 1e-9 in power and heats
    material, length = library.find(name), 1.6e-3
    open_voltage = solve_leg(material, hot, cold, 0.0).voltage
    # phi rises by the open-circuit voltage from hot to cold in a p leg; the load takes ``share`` of it
    density, entering, leaving = thermoelectric_leg(material, hot, cold, length, 1.4e-3, -share * open_voltage)
    leg = solve_leg(material, hot, cold, density * length)
    assert_allclose(leg.power / length, density * share * open_voltage, rtol=1e-7)
    assert_allclose(leg.power / length, entering - leaving, rtol=1e-7)
    assert_allclose(leg.hot_heat / length, entering, rtol=1e-7)
    assert_allclose(leg.cold_heat / length, leaving, rtol=1e-7)


def ramp(start, stop, size):
    """Return points from start to stop, close together at both ends."""
    return start + (stop - start) * (1 - np.cos(np.pi * np.linspace(0, 1, size))) / 2


def joined(*pieces):
    return np.unique(np.round(np.concatenate(pieces), 12))


@pytest.mark.parametrize(
    ("side", "length", "gap", "copper"),
    [
        (1.4e-3, 1.6e-3, 0.6e-3, 0.3e-3),
        (1.4e-3, 0.6e-3, 0.6e-3, 0.3e-3),
        (1.0e-3, 1.0e-3, 0.4e-3, 0.1e-3),
        (2.0e-3, 1.5e-3, 1.0e-3, 0.5e-3),
    ],
)
def test_electrode_of_a_leg_by_finite_elements(side, length, gap, copper):
    # electrodes on top to the right and below to the left, cut in the middle of the gaps; 2-D, depth = side.
    # The rule (a third of the side and half of the gap) within 0.2 % of the whole; found 0.007 % to 0.05 %
    rho_leg, rho_copper = 1.1e-5, 1.72e-8
    half = gap / 2
    xs = joined(ramp(-half, 0, 7), ramp(0, side, 17), ramp(side, side + half, 7))
    ys = joined(ramp(-copper, 0, 9), ramp(0, length, 17), ramp(length, length + copper, 9))
    mesh = MeshQuad.init_tensor(xs, ys)
    x, y = mesh.p[:, mesh.t].mean(axis=1)
    leg = (x > 0) & (x < side) & (y > 0) & (y < length)
    metal = ((y > length) & (x > 0)) | ((y < 0) & (x < side))
    mesh = mesh.restrict(np.flatnonzero(leg | metal))
    basis = Basis(mesh, ElementQuad2())
    y = mesh.p[1][mesh.t].mean(axis=0)
    inside = (y > 0) & (y < length)
    conductivity = np.where(inside, 1 / rho_leg, 1 / rho_copper)[:, None] * np.ones(basis.dx.shape)
    matrix = conduction.assemble(basis, k=conductivity)
    high = basis.get_dofs(lambda p: p[0] > side + half * (1 - 1e-9)).flatten()
    low = basis.get_dofs(lambda p: p[0] < -half * (1 - 1e-9)).flatten()
    potential = np.zeros(basis.N)
    potential[high] = 1.0
    potential = solve(*condense(matrix, x=potential, D=np.concatenate([high, low])))
    found = 1 / (potential @ matrix @ potential) / side
    expected = rho_leg * length / side**2 + 2 * rho_copper * path_over_section(side, gap, copper)
    assert_allclose(expected, found, rtol=2e-3)
    assert abs(expected - found) < 0.5 * (found - rho_leg * length / side**2)


def plate_resistance(side, gap, thickness, conductivity, copper):
    """Return mean temperature of the leg face per watt [K/W]: plate cell, copper over the leg and half of a gap.

    Far face of the plate at one temperature, sides of the cell adiabatic, even heat flux over the leg face; half of
    the cell by symmetry.
    """
    pitch, half = side + gap, gap / 2
    xs = joined(ramp(0, half, 4), ramp(half, half + side, 8), ramp(half + side, pitch, 4))
    ys = joined(ramp(0, half, 4), half + side / 2 * np.array([0.08, 0.25, 0.6, 1.0]))
    zs = joined(thickness * (1 - np.geomspace(1, 0.05, 6)), [thickness], thickness + np.array([0.2, 1.0]) * copper)
    mesh = MeshHex.init_tensor(xs, ys, zs)
    x, y, z = mesh.p[:, mesh.t].mean(axis=1)
    metal = (z > thickness) & (x > half) & (y > half)
    mesh = mesh.restrict(np.flatnonzero((z < thickness) | metal))
    basis = Basis(mesh, ElementHex2(), intorder=4)
    z = mesh.p[2][mesh.t].mean(axis=0)
    k = np.where(z > thickness, 390.0, conductivity)[:, None] * np.ones(basis.dx.shape)
    top, right = thickness + copper, half + side
    facets = mesh.facets_satisfying(lambda p: (p[2] > top * (1 - 1e-9)) & (p[0] < right), boundaries_only=True)
    face = FacetBasis(mesh, ElementHex2(), facets=facets)
    area = side**2 / 2
    load = source.assemble(face, f=1 / area * np.ones(face.dx.shape))
    assert_allclose(load.sum(), 1.0, rtol=1e-9)
    matrix = conduction.assemble(basis, k=k)
    cold = basis.get_dofs(lambda p: p[2] < 1e-9 * thickness).flatten()
    t = solve(*condense(matrix, load, D=cold))
    return float(load @ t) / 2  # the other half carries as much


@pytest.mark.parametrize(
    ("thickness", "conductivity", "gap", "tolerance"),
    [
        (1.0e-3, 25.0, 0.6e-3, 0.15),
        (0.64e-3, 25.0, 0.6e-3, 0.15),
        (1.0e-3, 25.0, 1.4e-3, 0.15),
        (0.64e-3, 170.0, 0.6e-3, 0.25),
    ],
)
def test_spreading_into_a_plate_by_finite_elements(thickness, conductivity, gap, tolerance):
    # found +11 %, +10 %, -4 %, -22 %. In the last, copper is hardly better than the plate and no longer at one
    # temperature; its spreading is 17 % of the plate's resistance, so the sum is off by 4 %
    side, copper = 1.4e-3, 0.3e-3
    cell, patch = (side + gap) ** 2, side * (side + gap / 2)
    whole = plate_resistance(side, gap, thickness, conductivity, copper)
    plain = thickness / (conductivity * cell)
    metal = copper / (390.0 * patch)
    found = whole - plain - metal
    expected = spreading_resistance(patch, cell, thickness, conductivity)
    assert_allclose(expected, found, rtol=tolerance)

"""Another way to the best free geometry: sequential quadratic programming of scipy on the model of ``evaluate``.

Unknowns are the logarithms of leg length, both leg sides and couples, not those of the search; limits are its
constraints, slopes come from central differences of one batch.
"""

import numpy as np
from scipy.optimize import minimize

from tegdesign.design.assemble import material
from tegdesign.design.evaluate import Candidates, evaluate
from tegdesign.design.size import job_of

STEP = 1e-4


def candidates(brief, x):
    """Return geometries of logarithms x (4, B)."""
    limits = brief.limits
    length, side_n, side_p, couples = np.exp(x)
    room = np.prod([side - 2 * limits.edge_margin for side in limits.footprint])
    index, ones = np.zeros(length.size, dtype=np.intp), np.ones(length.size)
    pitch = np.sqrt(room / (2 * couples))
    plate = ones * np.prod(limits.footprint)
    return Candidates(index, index + 1, length, side_n, side_p, pitch, couples, plate, ones, ones)


def aim_and_room(brief, job, x):
    """Return the logarithm of the aim and the room to every limit (rows) of points x (4, B)."""
    limits, c = brief.limits, candidates(brief, x)
    e = evaluate(job, c, tolerance=1e-10)
    thin, thick = np.minimum(c.side_n, c.side_p), np.maximum(c.side_n, c.side_p)
    room = [-limit.violation for limit in e.limits]
    room += [
        (c.pitch - (c.side_n + c.side_p) / 2) / limits.gap - 1,
        (c.pitch - limits.corner) / thick - 1,
        limits.slenderness * thin / c.leg_length - 1,
    ]
    return np.array([np.log(np.maximum(e.objective, 1e-12)), *room])


def best_free_objective(brief, start):
    """Return the best value of the aim and its geometry (leg length, sides, couples) from a start of the same kind."""
    job = job_of(brief, [material(getattr(brief.materials, s)[0], s, None) for s in "np"])
    known = {}

    def at(x):
        key = x.tobytes()
        if key not in known:
            moves = STEP * np.eye(4)
            points = np.concatenate([x[:, None], x[:, None] + moves, x[:, None] - moves], axis=1)
            v = aim_and_room(brief, job, points)
            known[key] = v[:, 0], (v[:, 1:5] - v[:, 5:]) / (2 * STEP)
        return known[key]

    limits = brief.limits
    least, most = (np.log(pair) for pair in zip(limits.leg_length, limits.leg_side, limits.leg_side, strict=True))
    bounds = [*zip(least, most, strict=True), tuple(np.log(limits.couples))]
    found = minimize(
        lambda x: -at(x)[0][0],
        np.log(start),
        jac=lambda x: -at(x)[1][0],
        method="SLSQP",
        bounds=bounds,
        constraints={"type": "ineq", "fun": lambda x: at(x)[0][1:], "jac": lambda x: at(x)[1][1:]},
        options={"maxiter": 60, "ftol": 1e-8},
    )
    assert found.success, found.message
    assert at(found.x)[0][1:].min() > -1e-6
    return float(np.exp(-found.fun)), np.exp(found.x)

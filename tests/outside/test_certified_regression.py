"""Certified linear regressions of NIST/ITL, Statistical Reference Datasets, through the function that fits members.

Data and certified values: NIST StRD, linear least squares, sets Pontius, Norris, NoInt1 and NoInt2
(US Government work). Estimates must agree to 9 digits, standard deviations to 7.
"""

import numpy as np
import pytest

from fieldfit.fit.least_squares import Problem, minimise

PONTIUS = [
    (.11019, 150000), (.21956, 300000), (.32949, 450000), (.43899, 600000), (.54803, 750000), (.65694, 900000),
    (.76562, 1050000), (.87487, 1200000), (.98292, 1350000), (1.09146, 1500000), (1.20001, 1650000), (1.30822,
    1800000), (1.41599, 1950000), (1.52399, 2100000), (1.63194, 2250000), (1.73947, 2400000), (1.84646, 2550000),
    (1.95392, 2700000), (2.06128, 2850000), (2.16844, 3000000), (.11052, 150000), (.22018, 300000), (.32939,
    450000), (.43886, 600000), (.54798, 750000), (.65739, 900000), (.76596, 1050000), (.87474, 1200000), (.98300,
    1350000), (1.09150, 1500000), (1.20004, 1650000), (1.30818, 1800000), (1.41613, 1950000), (1.52408, 2100000),
    (1.63159, 2250000), (1.73965, 2400000), (1.84696, 2550000), (1.95445, 2700000), (2.06177, 2850000), (2.16829,
    3000000),
]  # fmt: skip
NORRIS = [
    (0.1, 0.2), (338.8, 337.4), (118.1, 118.2), (888.0, 884.6), (9.2, 10.1), (228.1, 226.5), (668.5, 666.3), (998.5,
    996.3), (449.1, 448.6), (778.9, 777.0), (559.2, 558.2), (0.3, 0.4), (0.1, 0.6), (778.1, 775.5), (668.8, 666.9),
    (339.3, 338.0), (448.9, 447.5), (10.8, 11.6), (557.7, 556.0), (228.3, 228.1), (998.0, 995.8), (888.8, 887.6),
    (119.6, 120.2), (0.3, 0.3), (0.6, 0.3), (557.6, 556.8), (339.3, 339.1), (888.0, 887.2), (998.5, 999.0), (778.9,
    779.0), (10.2, 11.1), (117.6, 118.3), (228.9, 229.2), (668.4, 669.1), (449.2, 448.9), (0.2, 0.5),
]  # fmt: skip
NOINT1 = [
    (130, 60), (131, 61), (132, 62), (133, 63), (134, 64), (135, 65), (136, 66), (137, 67), (138, 68), (139, 69),
    (140, 70),
]  # fmt: skip
NOINT2 = [
    (3, 4), (4, 5), (4, 6),
]  # fmt: skip

#: name: data (y, x), powers of x, certified estimates, their standard deviations, residual standard deviation
CERTIFIED = {
    "Pontius": (
        PONTIUS,
        (0, 1, 2),
        (0.673565789473684e-03, 0.732059160401003e-06, -0.316081871345029e-14),
        (0.107938612033077e-03, 0.157817399981659e-09, 0.486652849992036e-16),
        0.205177424076185e-03,
    ),
    "Norris": (
        NORRIS,
        (0, 1),
        (-0.262323073774029, 1.00211681802045),
        (0.232818234301152, 0.429796848199937e-03),
        0.884796396144373,
    ),
    "NoInt1": (NOINT1, (1,), (2.07438016528926,), (0.165289256198347e-01,), 3.56753034006338),
    "NoInt2": (NOINT2, (1,), (0.727272727272727,), (0.420827318078432e-01,), 0.369274472937998),
}


@pytest.mark.parametrize("name", CERTIFIED)
def test_certified_values(name: str) -> None:
    rows, powers, estimates, deviations, residual_deviation = CERTIFIED[name]
    y, x = np.array(rows, dtype=float).T
    design = np.stack([x**power for power in powers], axis=1)
    free = np.full(len(powers), np.inf)
    problem = Problem(evaluate=lambda b: (design @ b - y, design.copy()), lower=-free, upper=free)
    found = minimise(problem, np.zeros(len(powers)))
    scatter = np.sqrt(found.sum_of_squares / found.degrees_of_freedom)
    assert found.rank == len(powers)
    np.testing.assert_allclose(found.unknowns, estimates, rtol=1e-9, atol=0)
    np.testing.assert_allclose(scatter, residual_deviation, rtol=1e-9)
    np.testing.assert_allclose(scatter * np.sqrt(np.diag(found.covariance)), deviations, rtol=1e-7, atol=0)

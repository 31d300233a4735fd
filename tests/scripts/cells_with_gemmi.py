"""Metric, reciprocal metric, volume, spacings, angles and B for 20 random cells, by gemmi.

Run:  python cells_with_gemmi.py > ../reference/cells_gemmi.csv      (pip install gemmi numpy)

gemmi orthogonalises with x along a, so its own matrix is not B of Busing & Levy (1967). B is taken from gemmi's
reciprocal metric instead: B^T B = G*, B upper triangular with a positive diagonal, which is unique (Cholesky).
"""
import csv
import platform
import sys

import gemmi
import numpy as np

SEED = 20250611
SYSTEMS = (['triclinic'] * 6 + ['monoclinic'] * 3 + ['orthorhombic'] * 3 + ['tetragonal'] * 2
           + ['rhombohedral'] * 2 + ['hexagonal'] * 2 + ['cubic'] * 2)
rng = np.random.default_rng(SEED)


def random_cell(system):
    a, b, c = np.round(rng.uniform(3, 40, 3), 4)
    al, be, ga = np.round(rng.uniform(65, 125, 3), 3)
    return {
        'triclinic': (a, b, c, al, be, ga),
        'monoclinic': (a, b, c, 90, max(be, 180 - be), 90),
        'orthorhombic': (a, b, c, 90, 90, 90),
        'tetragonal': (a, a, c, 90, 90, 90),
        'rhombohedral': (a, a, a, min(al, 115), min(al, 115), min(al, 115)),
        'hexagonal': (a, a, c, 90, 90, 120),
        'cubic': (a, a, a, 90, 90, 90),
    }[system]


def closes(cell):
    """Well away from flat, so that ten digits are a fair demand."""
    ca, cb, cg = np.cos(np.radians(cell[3:]))
    return 1 - ca * ca - cb * cb - cg * cg + 2 * ca * cb * cg > 0.1


def six(m):
    return [m.u11, m.u22, m.u33, m.u12, m.u13, m.u23]


def matrix(m):
    return np.array([[m.u11, m.u12, m.u13], [m.u12, m.u22, m.u23], [m.u13, m.u23, m.u33]])


def angle(u, v):
    return np.degrees(np.arctan2(np.linalg.norm(np.cross(u, v)), u @ v))


def random_hkl():
    while True:
        hkl = [int(x) for x in rng.integers(-7, 8, 3)]
        if any(hkl):
            return hkl


PAIRS = ['11', '22', '33', '12', '13', '23']
out = csv.writer(sys.stdout, lineterminator='\n')
print(f'# computed by gemmi {gemmi.__version__}, numpy {np.__version__}, python {platform.python_version()}, '
      f'seed {SEED}: scripts/cells_with_gemmi.py')
print('# g = metric (angstrom^2), r = reciprocal metric (1/angstrom^2), b = B of Busing & Levy from the reciprocal metric by Cholesky')
print('# d1..d3 = spacings of h1 k1 l1 .. h3 k3 l3; angle12, angle23 = degrees between the nodes, from gemmi\'s fractionalisation matrix')
out.writerow(['system', 'a', 'b', 'c', 'alpha', 'beta', 'gamma', 'volume'] + ['g' + p for p in PAIRS] + ['r' + p for p in PAIRS]
             + [f'b{i}{j}' for i in (1, 2, 3) for j in (1, 2, 3)]
             + [f'{x}{n}' for n in (1, 2, 3) for x in 'hkld'] + ['angle12', 'angle23'])
for system in SYSTEMS:
    while True:
        numbers = [float(x) for x in random_cell(system)]
        if closes(numbers):
            break
    cell = gemmi.UnitCell(*numbers)
    g, r = cell.metric_tensor(), cell.reciprocal_metric_tensor()
    b = np.linalg.cholesky(matrix(r)).T
    rows = np.array(cell.frac.mat.tolist())          # rows are a*, b*, c* in gemmi's Cartesian frame
    hkl = [random_hkl() for _ in range(3)]
    node = [np.array(h) @ rows for h in hkl]
    tail = [x for h in hkl for x in (*h, repr(cell.calculate_d(h)))]
    out.writerow([system, *map(repr, numbers), repr(cell.volume), *map(repr, six(g)), *map(repr, six(r)),
                  *(repr(float(x)) for x in b.ravel()), *tail,
                  repr(float(angle(node[0], node[1]))), repr(float(angle(node[1], node[2])))])

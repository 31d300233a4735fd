"""Every setting of random cases on every built-in machine, found by search: the reference of tests/outside/settings_by_search.rs.

A case is a machine, rules that settle its spare angles, UB, hkl and a wavelength. The unknowns are the angles of all axes
that move, the equations R U B h = Q and one smooth equation for each rule, written from the definitions alone (core's
`conventions`), without any closed form for angles. From random starts (uniform on every axis) a damped Gauss-Newton
iteration (Levenberg 1944, Marquardt 1963) runs to a root, or to a minimum that is none and is dropped. Starts are doubled
until two rounds in a row find nothing new (four, where nothing is found at all) and every solution has been met at least
MIN_HITS times. Solutions are polished by scipy.optimize.root and counted modulo 360 degrees. There are no limits, and all
zero offsets are 0.

Replaced by another draw are cases with a solution where the Jacobian is singular or nearly so (continua, double roots),
and those with a minimum that all but touches zero: they are tested apart.

The numbers of most cases are read off a random setting, which the search must then find again. About a fifth are drawn
independently, and some of those have no solution.

    python -m venv venv && venv/bin/pip install numpy==2.4.6 scipy==1.17.1
    OPENBLAS_NUM_THREADS=1 venv/bin/python tests/scripts/settings_by_search.py       (8 to 13 minutes on one core)

writes tests/reference/settings_by_search.ron: cases as RON, `rules` and `surface` as in a session, `ub` row by row in
reciprocal angstrom with columns a*, b*, c* in the head frame, `by_hand_deg` where tilt arcs stand, and under `settings_deg`
the readings of all axes in file order, in (-180, 180]. With --only N it prints every Nth case and writes nothing.
"""
import argparse
import itertools
import platform
import sys
import time
from fractions import Fraction
from pathlib import Path

import numpy as np
import scipy
from scipy.spatial.transform import Rotation

from setting_search import search
from setting_search.proof import Proof
from setting_search.search import Case, Look, Machine, sin_exit, sin_incidence

SEED = 20261201
RESULT = Path(__file__).resolve().parent / '../reference/settings_by_search.ron'
FACTORS = [Fraction(1, 2), Fraction(1), Fraction(-1), Fraction(2), Fraction(-1, 2), Fraction(3, 2), Fraction(1, 4)]
FOUR_CIRCLES = ['eulerian-four-circle', 'kappa-four-circle', 'eulerian-four-circle-vertical', 'kappa-four-circle-vertical']
NONE_SPARE = ['fixed-chi-three-circle', 'lifting-counter', 'spindle-with-arcs']
DETECTOR = ['HoldDetector', 'TieDetectors', 'DiffractionPlane']
TURN = ['Azimuth', 'Incidence', 'Exit', 'EqualIncidenceAndExit']
SAMPLE = ['Hold', 'Bisecting', 'BisectingAbout', 'TieToSample', 'TieToDetector']
# A random setting does not fulfil these.
BY_LUCK = {'Bisecting', 'BisectingAbout', 'EqualIncidenceAndExit'}
TRIES = 60


def mixes():
    """Machine and kinds of rule of every case."""
    for machine in NONE_SPARE:
        yield from [(machine, [])] * 6
    for machine in FOUR_CIRCLES:
        for kind in SAMPLE + TURN + ['Hold', 'Hold', 'Bisecting', 'Azimuth', 'TieToSample', 'TieToDetector']:
            yield machine, [kind]
    for mix in three_rules():
        yield 'six-circle', mix


def three_rules():
    """At most one rule may settle the detector, at most one the turn about Q; a bisecting rule stands once."""
    def of_sample(count):
        for mix in itertools.combinations_with_replacement(SAMPLE, count):
            if mix.count('Bisecting') < 2 and mix.count('BisectingAbout') < 2:
                yield list(mix)
    for first, second in itertools.product(DETECTOR, TURN):
        yield from ([first, second] + rest for rest in of_sample(1))
    for first in DETECTOR + TURN:
        yield from ([first] + rest for rest in of_sample(2))
    yield from of_sample(3)


class Draw:
    """The numbers of one case, drawn; fails with Refused where they make no sense together."""

    class Refused(Exception):
        pass

    def __init__(self, machine, kinds, independent, rng):
        self.rng, self.machine, self.kinds = rng, machine, kinds
        self.case = Case(machine, rng)
        self.seed_deg = self.setting()
        self.crystal(self.seed_deg)
        at_deg = self.setting() if independent else self.seed_deg
        self.at_deg, self.look = at_deg, Look(machine, np.radians(at_deg)[:, None].astype(complex))
        self.surface = self.direction() if set(kinds) & {'Incidence', 'Exit', 'EqualIncidenceAndExit'} else None
        self.held = []
        self.case.rules = [self.rule(kind) for kind in rng.permutation(kinds)] if kinds else []
        self.check_freedom()
        self.seeded = not independent and not BY_LUCK & set(kinds)

    def setting(self):
        """Angles in degrees with 2 theta between 8 and 150 degrees."""
        while True:
            deg = np.round(self.rng.uniform(-180, 180, len(self.machine.axes)), 3)
            deg = np.where(self.machine.by_hand, self.case.by_hand_deg, deg)
            cosine = self.machine.diffracted(np.radians(deg)[:, None].astype(complex))[2, 0].real
            if np.cos(np.radians(150)) < cosine < np.cos(np.radians(8)):
                return deg

    def crystal(self, seed_deg):
        """A cell, its setting and a wavelength for which the node diffracts at the seed."""
        look = Look(self.machine, np.radians(seed_deg)[:, None].astype(complex))
        q = look.q[:, 0].real
        head = np.stack([self.machine.in_lab(look.x, e)[:, 0].real for e in np.eye(3)]).dot(q)
        while True:
            lengths, (alpha, beta, gamma) = self.rng.uniform(4, 15, 3), np.radians(self.rng.uniform(70, 110, 3))
            across = (np.cos(alpha) - np.cos(beta) * np.cos(gamma)) / np.sin(gamma)
            edges = np.array([[1, np.cos(gamma), np.cos(beta)], [0, np.sin(gamma), across],
                              [0, 0, np.sqrt(np.sin(beta) ** 2 - across ** 2)]]) * lengths
            self.hkl = self.rng.integers(-5, 6, 3)
            node = np.linalg.inv(edges).T @ self.hkl
            wavelength = np.linalg.norm(q) / max(np.linalg.norm(node), 1e-3)
            if 0.4 < wavelength < 4:
                break
        spin = Rotation.from_rotvec(self.rng.uniform(0, 2 * np.pi) * node / np.linalg.norm(node))
        turn = Rotation.align_vectors(head[None], node[None])[0] * spin
        self.ub = turn.as_matrix() @ np.linalg.inv(edges).T
        self.case.q_in_head, self.case.wavelength = self.ub @ self.hkl, float(np.round(wavelength, 6))

    def direction(self):
        """Text and unit vector in the head frame of a short lattice vector that is far from Q's direction."""
        while True:
            a, b, c = (int(i) for i in self.rng.integers(-2, 3, 3))
            if self.rng.random() < 0.65:
                text, vector = f'Reciprocal(h: {a}, k: {b}, l: {c})', self.ub @ [a, b, c]
            else:
                text, vector = f'Direct(u: {a}, v: {b}, w: {c})', np.linalg.inv(self.ub).T @ [a, b, c]
            if (a, b, c) != (0, 0, 0):
                vector = vector / np.linalg.norm(vector)
                if abs(vector @ self.case.q_in_head) < 0.95 * np.linalg.norm(self.case.q_in_head):
                    return text, vector

    def rule(self, kind):
        machine, rng = self.machine, self.rng
        sample, detector = range(machine.sample), range(machine.sample, len(machine.axes))
        if kind == 'Hold' or kind == 'HoldDetector':
            axis = int(rng.choice([i for i in (sample if kind == 'Hold' else detector) if i not in self.held]))
            self.held.append(axis)
            return search.hold(machine, axis, float(self.at_deg[axis]))
        if kind.startswith('Tie'):
            axis = int(rng.choice(detector if kind == 'TieDetectors' else sample))
            others = sample if kind == 'TieToSample' else detector
            to, factor = int(rng.choice([i for i in others if i != axis])), rng.choice(FACTORS)
            offset = np.remainder(self.at_deg[axis] - float(factor) * self.at_deg[to] + 180, 360) - 180
            return search.tie(machine, axis, to, factor, float(np.round(offset, 3)))
        if kind == 'Bisecting':
            return search.bisecting(machine)
        if kind == 'BisectingAbout':
            return search.bisecting(machine, int(rng.choice([0, 0, 2])) if machine.sample == 4 else 1)
        if kind == 'DiffractionPlane':
            turned = np.degrees(np.arctan2(*self.look.k_f[1::-1, 0].real))
            return search.diffraction_plane(float(np.round(rng.choice([turned, turned, turned, 0, 90]), 3)))
        if kind == 'Azimuth':
            text, n = self.direction()
            in_lab, (t, e) = machine.in_lab(self.look.x, n), self.look.azimuth_axes()
            psi = np.degrees(np.arctan2(search.dot(in_lab, e)[0].real, search.dot(in_lab, t)[0].real))
            return search.azimuth(machine, text, n, float(np.round(psi, 3)))
        normal = self.surface[1]
        sine = (sin_incidence if kind == 'Incidence' else sin_exit)(self.look, normal)[0].real
        return search.surface_rule(kind, normal, float(np.round(np.degrees(np.arcsin(sine)), 3)))

    def check_freedom(self):
        """The same freedom must not be settled twice: no row depends on others, one condition at most on the detector."""
        rows = np.array([rule.row for rule in self.case.rules if rule.row is not None])
        plane = sum(rule.kind == 'DiffractionPlane' for rule in self.case.rules)
        if len(rows) == 0:
            return
        rank = np.linalg.matrix_rank(rows)
        on_detector = rank - np.linalg.matrix_rank(rows[:, :self.machine.sample])
        if rank < len(rows) or on_detector + plane > 1:
            raise self.Refused

    def check(self, settings):
        """Proves every setting by other means; 1 if the setting that the case was read off is known and among them."""
        for x in settings:
            Proof(self.machine, self.case.full(x[:, None])[:, 0], self.case.wavelength).check(
                self.ub @ self.hkl, self.case.rules)
        if not self.seeded:
            return 0
        seed = np.radians(self.seed_deg)[self.case.free]
        roots, _ = self.case.roots_from(seed[None])
        far = np.abs(search.wrapped(roots - seed)).max(initial=0) > np.radians(1)
        if far or len(roots) == 0 or not self.case.signs_hold(roots)[0]:
            return 0
        assert (np.abs(search.wrapped(settings - roots[0])).max(axis=1) < np.radians(search.SAME_DEG)).any()
        return 1

    def text(self, settings):
        def row(numbers):
            return ', '.join(repr(float(number)) for number in numbers)
        by_hand = ', '.join(f'"{name}": {deg!r}' for name, deg, hand in
                            zip(self.machine.names, self.case.by_hand_deg.tolist(), self.machine.by_hand) if hand)
        lines = ''.join(f'            [{readings(self.case.full(x[:, None])[:, 0])}],\n' for x in settings)
        return (f'    (\n        machine: "{self.machine.name}",\n        by_hand_deg: {{{by_hand}}},\n'
                f'        rules: [{", ".join(rule.text for rule in self.case.rules)}],\n'
                f'        surface: {f"Some({self.surface[0]})" if self.surface else "None"},\n'
                f'        ub: ({"), (".join(row(line) for line in self.ub).join(["(", ")"])}),\n'
                f'        hkl: ({", ".join(str(int(i)) for i in self.hkl)}),\n'
                f'        wavelength_angstrom: {self.case.wavelength!r},\n'
                f'        settings_deg: [\n{lines}        ],\n    ),\n')


def readings(x):
    """In (-180, 180], ten decimals: -180 itself cannot come out, as rounding is done first."""
    deg = np.round(np.degrees(x), 10)
    deg = np.where(deg <= -180, deg + 360, deg) + 0.0
    return ', '.join(f'{d:.10f}'.rstrip('0').rstrip('.') for d in deg)


def one_case(machine, kinds, rng):
    """A case with its settings; how many draws were replaced."""
    independent = rng.random() < 0.2
    for replaced in range(TRIES):
        try:
            draw = Draw(machine, kinds, independent, rng)
        except Draw.Refused:
            continue
        settings = draw.case.solve()
        if settings is not None and (len(settings) or independent):
            return draw, settings, replaced
    return None


def main():
    options = argparse.ArgumentParser()
    options.add_argument('--only', type=int)
    only = options.parse_args().only
    rng, begin = np.random.default_rng(SEED), time.monotonic()
    machines, texts, seeds, fewest_hits, most_starts, counts = {}, [], 0, 10 ** 9, 0, []
    for machine, kinds in list(mixes())[::only]:
        found = one_case(machines.setdefault(machine, Machine(machine)), kinds, rng)
        if found is None:
            sys.stderr.write(f'left out, no draw of {TRIES} is regular: {machine} {kinds}\n')
            continue
        draw, settings, replaced = found
        seeds += draw.check(settings)
        counts.append(len(settings))
        fewest_hits = min(fewest_hits, draw.case.hits or fewest_hits)
        most_starts = max(most_starts, draw.case.starts)
        texts.append(draw.text(settings))
        sys.stderr.write(f'{time.monotonic() - begin:6.1f} s  {machine} {"+".join(kinds)}: {len(settings)} settings, '
                         f'{draw.case.starts} starts, fewest hits {draw.case.hits}, {replaced} draws before it\n')
    header = (f'// Made by tests/scripts/settings_by_search.py: seed {SEED}; Python {platform.python_version()}, '
              f'numpy {np.__version__}, scipy {scipy.__version__}.\n'
              f'// {len(counts)} cases with {sum(counts)} settings, {counts.count(0)} cases without any; '
              f'{seeds} of {seeds} settings that cases were read off are among them.\n'
              f'// Every setting was met at least {fewest_hits} times; starts of one case: at most {most_starts}.\n')
    if only:
        sys.stdout.write(header + '[\n' + ''.join(texts) + ']\n')
    else:
        RESULT.write_text(header + '[\n' + ''.join(texts) + ']\n', encoding='utf-8')


if __name__ == '__main__':
    main()

"""A goniometer, rules as smooth equations, and every setting that fulfils them, by search. See settings_by_search.py."""
import itertools
from pathlib import Path

import numpy as np
from scipy.optimize import root

from .ron_reader import read_ron

MACHINES = Path(__file__).resolve().parent / '../../../assets/instruments'
FIRST_ROUND, LAST_ROUND, MIN_HITS = 768, 400_000, 8
STEP = 1e-30                        # of the complex-step derivative: below rounding, so derivatives are exact
ROOT, SAME_DEG, SINGULAR, NEARLY = 1e-11, 1e-5, 1e-4, 1e-4
BEAM = np.array([0.0, 0.0, 1.0])


# ---- arithmetic on numbers whose imaginary part is a derivative times STEP; vectors are (3, many)

def sine(z):
    return np.sin(z.real) + 1j * z.imag * np.cos(z.real)


def cosine(z):
    return np.cos(z.real) - 1j * z.imag * np.sin(z.real)


def cross(u, v):
    return np.stack([u[1] * v[2] - u[2] * v[1], u[2] * v[0] - u[0] * v[2], u[0] * v[1] - u[1] * v[0]])


def dot(u, v):
    return u[0] * v[0] + u[1] * v[1] + u[2] * v[2]


def unit(v):
    return v / np.sqrt(dot(v, v))


def column(v):
    return np.asarray(v, dtype=float)[:, None]


def wrapped(radians):
    """Into (-pi, pi]."""
    return np.pi - np.mod(np.pi - radians, 2 * np.pi)


class Machine:
    """Axes in file order, sample axes first: names, unit vectors, which are set by hand."""

    def __init__(self, name):
        text = read_ron((MACHINES / f'{name}.ron').read_text(encoding='utf-8'))
        axes = text['sample_axes'] + text['detector_axes']
        self.name, self.sample = name, len(text['sample_axes'])
        self.names = [axis['name'] for axis in axes]
        self.axes = np.array([self.direction(axis) for axis in axes])
        self.by_hand = np.array([axis.get('set_by_hand', False) for axis in axes])
        assert all(axis.get('zero_offset_deg', 0) == 0 for axis in axes)
        self.spindle = self.names.index(text['spindle'])

    @staticmethod
    def direction(axis):
        straight = np.array(axis['direction'], dtype=float)
        straight /= np.linalg.norm(straight)
        if axis.get('inclined') is None:
            return straight
        sideways = np.array(axis['inclined']['towards'], dtype=float)
        sideways -= straight * (straight @ sideways)
        angle = np.radians(axis['inclined']['by_deg'])
        return np.cos(angle) * straight + np.sin(angle) * sideways / np.linalg.norm(sideways)

    def turned(self, x, axes, v):
        """A vector carried by these axes (positions, outermost first) at the angles x in radians."""
        for i in reversed(list(axes)):
            a, s, c = column(self.axes[i]), sine(x[i]), cosine(x[i])
            v = v * c + cross(a, v) * s + a * (dot(a, v) * (1 - c))
        return v

    def in_lab(self, x, v):
        return self.turned(x, range(self.sample), column(v))

    def diffracted(self, x):
        return self.turned(x, range(self.sample, len(self.axes)), column(BEAM))


# ---- rules

def linear_rule(row, offset_rad):
    """row . x = offset modulo a full turn; row is whole numbers."""
    scale = 2.0 / np.abs(row).max()
    return lambda look: scale * sine(0.5 * (np.tensordot(row, look.x, 1) - offset_rad))


class Rule:
    """Its text, one smooth equation, the condition of sign that the equation leaves open, the row if it is linear, and the
    numbers it was made of, for the proof."""

    def __init__(self, kind, text, equation, sign=None, row=None, **numbers):
        self.kind, self.text, self.equation, self.sign, self.row, self.numbers = kind, text, equation, sign, row, numbers


class Look:
    """What rules are written in: k_f and t (unit), Q, angles, for many settings at once."""

    def __init__(self, machine, x):
        self.machine, self.x = machine, x
        self.k_f = machine.diffracted(x)
        self.q = self.k_f - column(BEAM)

    def azimuth_axes(self):
        along, t = unit(self.q), unit(self.k_f + column(BEAM))
        return t, cross(along, t)

    def axis(self, i):
        """Direction of a sample axis after the outer ones have turned."""
        return self.machine.turned(self.x, range(i), column(self.machine.axes[i]))


def hold(machine, axis, angle_deg):
    row = np.zeros(len(machine.axes))
    row[axis] = 1
    text = f'Hold(axis: "{machine.names[axis]}", at_deg: {angle_deg!r})'
    return Rule('Hold', text, linear_rule(row, np.radians(angle_deg)), row=row, axis=axis, at_deg=angle_deg)


def tie(machine, axis, to, factor, offset_deg):
    # axis = factor (to + 360 k) + offset + 360 j for some whole k, j; with factor = p/q in lowest terms that is
    # q axis - p to = q offset modulo 360.
    row = np.zeros(len(machine.axes))
    row[axis], row[to] = factor.denominator, -factor.numerator
    text = (f'Tie(axis: "{machine.names[axis]}", to: "{machine.names[to]}", factor: {float(factor)!r}, '
            f'offset_deg: {offset_deg!r})')
    return Rule('Tie', text, linear_rule(row, factor.denominator * np.radians(offset_deg)), row=row,
                axis=axis, to=to, factor=factor, offset_deg=offset_deg)


def bisecting(machine, about=None):
    reference = machine.spindle - 2 if about is None else about
    text = 'Bisecting' if about is None else f'BisectingAbout(axis: "{machine.names[about]}")'

    def equation(look):
        return dot(look.axis(machine.spindle), cross(unit(look.q), look.axis(reference)))
    return Rule('Bisecting' if about is None else 'BisectingAbout', text, equation, reference=reference)


def azimuth(machine, reference_text, reference, psi_deg):
    c, s = np.cos(np.radians(psi_deg)), np.sin(np.radians(psi_deg))

    def parts(look):
        n, (t, e) = machine.in_lab(look.x, reference), look.azimuth_axes()
        return dot(n, t), dot(n, e)

    def equation(look):
        along, across = parts(look)
        return c * across - s * along

    def sign(look):
        along, across = parts(look)
        return (c * along + s * across).real > 0
    text = f'Azimuth(reference: {reference_text}, at_deg: {psi_deg!r})'
    return Rule('Azimuth', text, equation, sign, reference=reference, at_deg=psi_deg)


def sin_incidence(look, normal):
    return -dot(look.machine.in_lab(look.x, normal), column(BEAM))


def sin_exit(look, normal):
    return dot(look.machine.in_lab(look.x, normal), look.k_f)


def surface_rule(kind, normal, alpha_deg):
    if kind == 'EqualIncidenceAndExit':
        return Rule(kind, kind, lambda look: sin_incidence(look, normal) - sin_exit(look, normal), normal=normal)
    wanted = np.sin(np.radians(alpha_deg))
    sin_of = sin_incidence if kind == 'Incidence' else sin_exit
    text = f'{kind}(at_deg: {alpha_deg!r})'
    return Rule(kind, text, lambda look: sin_of(look, normal) - wanted, normal=normal, at_deg=alpha_deg)


def diffraction_plane(turned_deg):
    normal = column([-np.sin(np.radians(turned_deg)), np.cos(np.radians(turned_deg)), 0.0])
    text = f'DiffractionPlane(turned_deg: {turned_deg!r})'
    return Rule('DiffractionPlane', text, lambda look: dot(look.k_f, normal), turned_deg=turned_deg)


# ---- one case

class Case:
    """Rules, q_in_head = U B h and the wavelength are set after it is made; angles of axes set by hand are given."""

    def __init__(self, machine, rng):
        self.machine, self.rules, self.rng = machine, [], rng
        self.by_hand_deg = np.where(machine.by_hand, np.round(rng.uniform(-18, 18, len(machine.axes)), 1), 0.0)
        self.fixed = np.radians(self.by_hand_deg)
        self.free = np.flatnonzero(~machine.by_hand)

    def full(self, x_free):
        x = np.tile(self.fixed[:, None].astype(x_free.dtype), (1, x_free.shape[1]))
        x[self.free] = x_free
        return x

    def residuals(self, x_free):
        look = Look(self.machine, self.full(x_free))
        rows = list(self.machine.in_lab(look.x, self.q_in_head * self.wavelength) - look.q)
        return np.stack(rows + [rule.equation(look) for rule in self.rules])

    def evaluate(self, x):
        """Residuals (many, N) and Jacobians (many, N, N) at x (many, N)."""
        many, n = x.shape
        stepped = x.T[:, None, :] + 1j * STEP * np.eye(n)[:, :, None]
        both = self.residuals(stepped.reshape(n, n * many)).reshape(n, n, many)
        return both[:, 0].real.T.copy(), (both.imag / STEP).transpose(2, 0, 1).copy()

    def signs_hold(self, x):
        look = Look(self.machine, self.full(x.T.astype(complex)))
        good = np.ones(len(x), dtype=bool)
        for rule in self.rules:
            if rule.sign is not None:
                good &= rule.sign(look)
        return good

    def roots_from(self, x):
        """Where a damped Gauss-Newton iteration ends: roots, and the smallest residual of what is no root."""
        found, nearly = [], np.inf
        damping = np.full(len(x), 0.05)
        r, jacobian = self.evaluate(x)
        for _ in range(200):
            gradient = np.einsum('kij,ki->kj', jacobian, r)
            size = np.linalg.norm(r, axis=1)
            done = size < ROOT
            stuck = ~done & (np.linalg.norm(gradient, axis=1) < 1e-6 * size)
            found.append(x[done])
            nearly = min(nearly, size[stuck].min(initial=np.inf))
            keep = ~(done | stuck)
            x, r, jacobian, damping = x[keep], r[keep], jacobian[keep], damping[keep]
            gradient, size = gradient[keep], size[keep]
            if len(x) == 0:
                break
            normal = np.einsum('kij,kil->kjl', jacobian, jacobian)
            # Azimuth and the plane of Q turn fast near 2 theta = 0 and 180 degrees: there the damping must grow along.
            ridge = damping + 1e-13 * np.trace(normal, axis1=1, axis2=2)
            normal += ridge[:, None, None] * np.eye(x.shape[1])
            step = -np.linalg.solve(normal, gradient[:, :, None])[:, :, 0]
            step *= np.minimum(1, 1 / np.abs(step).max(axis=1))[:, None]
            r_new, jacobian_new = self.evaluate(x + step)
            better = np.linalg.norm(r_new, axis=1) < size
            x = np.where(better[:, None], x + step, x)
            r = np.where(better[:, None], r_new, r)
            jacobian = np.where(better[:, None, None], jacobian_new, jacobian)
            damping = np.clip(np.where(better, damping * 0.15, damping * 5), 1e-12, 1e6)
        # What is still on its way creeps, as near a singular root.
        nearly = min(nearly, np.linalg.norm(r, axis=1).min(initial=np.inf))
        return np.concatenate(found), nearly

    def solve(self):
        """Every solution in radians (many, N); None if the case is to be replaced."""
        known, hits, quiet, count = np.empty((0, len(self.free))), [], 0, FIRST_ROUND
        self.starts = 0
        # Where nothing is found there are no hits to judge by: two more rounds, four times as many starts again.
        while quiet < (2 if hits else 4) or min(hits, default=MIN_HITS) < MIN_HITS:
            if count > LAST_ROUND:
                return None
            new, self.starts = 0, self.starts + count
            for _ in range(0, count, FIRST_ROUND):
                roots, nearly = self.roots_from(self.rng.uniform(-np.pi, np.pi, (FIRST_ROUND, len(self.free))))
                if nearly < NEARLY:
                    return None
                while len(roots):
                    same = np.abs(wrapped(roots - roots[0])).max(axis=1) < np.radians(SAME_DEG)
                    at = np.flatnonzero(np.abs(wrapped(known - roots[0])).max(axis=1) < np.radians(SAME_DEG))
                    if len(at):
                        hits[at[0]] += same.sum()
                    else:
                        known, new = np.vstack([known, wrapped(roots[0])]), new + 1
                        hits.append(same.sum())
                    roots = roots[~same]
                if len(known) > 3000:
                    return None                       # a continuum
            if len(known) and np.linalg.svd(self.evaluate(known)[1], compute_uv=False).min() < SINGULAR:
                return None
            quiet = 0 if new else quiet + 1
            count *= 2
        self.hits = min(hits, default=0)
        return self.polished(known)

    def polished(self, known):
        solutions = []
        for x in known:
            one = root(lambda y: self.evaluate(y[None])[0][0], x, jac=lambda y: self.evaluate(y[None])[1][0], tol=1e-15)
            assert np.abs(self.evaluate(one.x[None])[0]).max() < 1e-13
            solutions.append(wrapped(one.x))
        solutions = np.array(solutions).reshape(-1, len(self.free))
        solutions = solutions[self.signs_hold(solutions)] if len(solutions) else solutions
        for a, b in itertools.combinations(solutions, 2):
            assert np.abs(wrapped(a - b)).max() > np.radians(SAME_DEG)
        return solutions[np.lexsort(np.round(solutions, 9).T[::-1])]

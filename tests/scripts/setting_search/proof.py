"""A setting against the definitions in their own words, with rotations by scipy: nothing of the search is used."""
import numpy as np
from scipy.spatial.transform import Rotation

BEAM = np.array([0.0, 0.0, 1.0])
LENGTH, DEG = 1e-12, 1e-8


def degrees_apart(a_deg, b_deg):
    return abs(np.remainder(a_deg - b_deg + 180, 360) - 180)


def unit(v):
    return v / np.linalg.norm(v)


class Proof:
    def __init__(self, machine, x, wavelength):
        self.machine, self.deg = machine, np.degrees(x)
        self.turns = [Rotation.from_rotvec(angle * axis) for angle, axis in zip(x, machine.axes)]
        self.lab_from_head = self.product(range(machine.sample))
        self.k_f = self.product(range(machine.sample, len(machine.axes))).apply(BEAM)
        self.q = (self.k_f - BEAM) / wavelength

    def product(self, axes):
        all_turns = Rotation.identity()
        for i in axes:
            all_turns = all_turns * self.turns[i]
        return all_turns

    def check(self, q_in_head, rules):
        assert np.linalg.norm(self.lab_from_head.apply(q_in_head) - self.q) < LENGTH
        for rule in rules:
            assert getattr(self, rule.kind)(**rule.numbers), rule.text

    def Hold(self, axis, at_deg):
        return degrees_apart(self.deg[axis], at_deg) < DEG

    def Tie(self, axis, to, factor, offset_deg):
        tied = (float(factor) * (self.deg[to] + 360 * k) + offset_deg for k in range(factor.denominator))
        return any(degrees_apart(self.deg[axis], one) < DEG for one in tied)

    def spans(self, *vectors):
        """Whether unit vectors lie in one plane: the smallest singular value is zero."""
        return np.linalg.svd(np.array(vectors), compute_uv=False)[-1] < LENGTH

    def Bisecting(self, reference):
        spindle, reference = (self.product(range(i)).apply(self.machine.axes[i])
                              for i in (self.machine.spindle, reference))
        return self.spans(spindle, reference, unit(self.q))

    BisectingAbout = Bisecting

    def Azimuth(self, reference, at_deg):
        """The reference's part across Q is t, turned right-handed about Q by psi."""
        n, along = self.lab_from_head.apply(reference), unit(self.q)
        turned = Rotation.from_rotvec(np.radians(at_deg) * along).apply(unit(self.k_f + BEAM))
        return np.linalg.norm(unit(n - along * (along @ n)) - turned) < 1e-11

    def alphas_deg(self, normal):
        """90 degrees less the angle between the normal and the way back along the beam, and k_f."""
        n = self.lab_from_head.apply(normal)
        return [90 - 2 * np.degrees(np.arctan2(np.linalg.norm(n - v), np.linalg.norm(n + v))) for v in (-BEAM, self.k_f)]

    def Incidence(self, normal, at_deg):
        return abs(self.alphas_deg(normal)[0] - at_deg) < DEG

    def Exit(self, normal, at_deg):
        return abs(self.alphas_deg(normal)[1] - at_deg) < DEG

    def EqualIncidenceAndExit(self, normal):
        alpha_i, alpha_f = self.alphas_deg(normal)
        return abs(alpha_i - alpha_f) < DEG

    def DiffractionPlane(self, turned_deg):
        across = Rotation.from_euler('z', turned_deg, degrees=True).apply([1.0, 0.0, 0.0])
        return self.spans(self.k_f, BEAM, across)

"""A million nodes on a Eulerian four-circle in numpy: the other side of the speed comparison.

Task, the same as that of the Rust benchmark: all nodes of a cubic cell of 30 angstrom with d >= 0.48 angstrom, wavelength
0.71 angstrom, one fixed U, the axes and limits of assets/instruments/eulerian-four-circle.ron, rule *bisecting*. For each
node: every setting with its readings, the clearance of each axis modulo 360 degrees, the verdict, the setting chosen
(farthest from the limits of the moving sample axes, else the one that misses least) and its readings.

    python million_nodes.py [--short] [--runs N] [--wavelength ANGSTROM] [--check]

(default)  the eight settings by the general closed forms: axis directions are data, spherical triangles (Paden & Kahan's
           subproblems) for each detector sign, each side of Q and each opening.
--short    the four settings of the Eulerian short cut: omega = theta or theta + 180 on each detector side, chi = asin,
           |chi| <= 90. What can be reached is the same, because the limits of chi are symmetric about zero.
--check    also proves a sample of settings by the forward equation R U h / a = Q, and that both roads agree.

U = Ry(20) Rz(35) Rx(50), right-handed rotations in degrees about the laboratory's y, z and x.

Prints one line: the road and its median seconds (wall clock), then pairs of name and value: the count of each verdict, the
sum of the clearances of reachable nodes in degrees (a checksum on the settings chosen), all nodes, and the median
seconds of processor time, which a busy machine spoils less. For example
    eight 2.710 reachable 1023316 over_limit 0 direct_beam 32 outside_sphere 0 clearance_sum 5.488385764e+07 nodes 1023348
    cpu 2.650
(on one line)
"""
import argparse
import statistics
import time

import numpy as np

A, D_MIN = 30.0, 0.48
OMEGA, CHI, PHI, TWO_THETA = np.eye(3)[[1, 2, 1, 1]]
# Smallest and largest reading in degrees; none for phi, which is endless.
LIMITS = {'omega': (-65.0, 95.0), 'chi': (-100.0, 100.0), 'two_theta': (-95.0, 130.0)}
CONE_DEG = 3.0
DUST_DEG = 1e-9
RAD = np.pi / 180.0
REACHABLE, OVER_LIMIT, DIRECT_BEAM, OUTSIDE = 0, 1, 2, 3


def rotation(axis, deg):
    """Right-handed rotation about a unit axis (Rodrigues)."""
    k = np.array([[0, -axis[2], axis[1]], [axis[2], 0, -axis[0]], [-axis[1], axis[0], 0]])
    return np.eye(3) + np.sin(deg * RAD) * k + (1 - np.cos(deg * RAD)) * (k @ k)


U = rotation(np.eye(3)[1], 20.0) @ rotation(np.eye(3)[2], 35.0) @ rotation(np.eye(3)[0], 50.0)


def indices():
    """Every h k l with d >= D_MIN except 0 0 0, as three rows."""
    top = int(A / D_MIN)
    line = np.arange(-top, top + 1)
    h, k, l = np.meshgrid(line, line, line, indexing='ij')
    square = h * h + k * k + l * l
    keep = (square > 0) & (square <= (A / D_MIN) ** 2)
    return np.stack([h[keep], k[keep], l[keep]]).astype(float)


def clearance(deg, limits):
    """Degrees inside the limits (negative outside) of the representative deg + 360 k nearest to their centre."""
    low, high = limits
    off = deg - 0.5 * (low + high)
    off -= 360.0 * np.rint(off / 360.0)
    return 0.5 * (high - low) - np.abs(off)


class Choice:
    """Keeps, node by node, the best setting seen so far: allowed before not allowed, then the roomier."""

    def __init__(self, count):
        self.merit = np.full(count, -np.inf)
        self.readings = np.zeros((4, count))

    def offer(self, omega, chi, phi, two_theta, detector_clearance):
        """Readings in degrees; two_theta may be one value for each node."""
        sample = np.minimum(clearance(omega, LIMITS['omega']), clearance(chi, LIMITS['chi']))
        worst = np.minimum(sample, detector_clearance)
        merit = np.where(worst < -DUST_DEG, -1e6 + worst, sample)
        better = merit > self.merit + DUST_DEG
        self.merit = np.where(better, merit, self.merit)
        for row, new in zip(self.readings, (omega, chi, phi, two_theta)):
            np.copyto(row, new, where=better)

    def verdicts(self, sin_theta, two_theta):
        verdict = np.where(self.merit < -1e5, OVER_LIMIT, REACHABLE)
        verdict[two_theta < CONE_DEG - DUST_DEG] = DIRECT_BEAM
        verdict[sin_theta > 1] = OUTSIDE
        return verdict


def angle_between(u, v):
    """Angle of unit vectors (rows of three) by half angles: accurate at both ends."""
    return 2 * np.arctan2(np.linalg.norm(u - v, axis=0), np.linalg.norm(u + v, axis=0))


def dial(axis, towards):
    """Mark and quarter: two directions across an axis, the first on the side of another direction."""
    mark = towards - axis * (axis @ towards)
    mark /= np.linalg.norm(mark)
    return mark, np.cross(axis, mark)


def eight(node, wavelength):
    """All eight settings by the general closed forms; only OMEGA, CHI, PHI and TWO_THETA say that this is a Eulerian cradle."""
    length = np.linalg.norm(node, axis=0)
    carried = node / length
    sin_theta = 0.5 * wavelength * length
    sideways = np.cross(TWO_THETA, [0, 0, 1.0])
    tilt = np.linalg.norm(sideways)
    sideways /= tilt
    forward = (np.array([0, 0, 1.0]) - TWO_THETA * TWO_THETA[2]) / tilt
    s = np.minimum(sin_theta / tilt, 1.0)
    c = np.sqrt(1 - s * s)
    detector = 2 * np.arcsin(s) / RAD

    outer_mark, outer_quarter = dial(OMEGA, CHI)
    inner_mark, inner_quarter = dial(PHI, CHI)
    middle_mark, middle_quarter = dial(CHI, OMEGA)
    first, second = angle_between(OMEGA, CHI), angle_between(CHI, PHI)
    middle_zero = np.arctan2(-(middle_quarter @ PHI), middle_mark @ PHI)

    rho = angle_between(carried, PHI[:, None])
    carried_phase = np.arctan2(inner_quarter @ carried, inner_mark @ carried)
    choice = Choice(node.shape[1])
    for sign in (1.0, -1.0):
        q = sign * c * sideways[:, None] - s * forward[:, None]
        mu = angle_between(q, OMEGA[:, None])
        q_phase = np.arctan2(outer_quarter @ q, outer_mark @ q)
        two_theta = sign * detector
        detector_clearance = clearance(two_theta, LIMITS['two_theta'])
        for side in (1.0, -1.0):
            # The spindle goes to zeta from omega, in the plane of omega and Q.
            zeta = mu + side * rho
            cosine = (np.cos(zeta) - np.cos(first) * np.cos(second)) / (np.sin(first) * np.sin(second))
            opening = np.arccos(np.clip(cosine, -1, 1))
            flip = np.where(np.sin(zeta) < 0, np.pi, 0.0)
            for hand in (1.0, -1.0):
                # Where the spindle stands about omega, and omega about the spindle, seen from the middle axis.
                sin_open, cos_open = hand * np.sin(opening), np.cos(opening)
                at_outer = np.arctan2(-sin_open * np.sin(second),
                                      np.cos(second) * np.sin(first) - np.sin(second) * np.cos(first) * cos_open)
                at_inner = np.arctan2(sin_open * np.sin(first),
                                      np.cos(first) * np.sin(second) - np.sin(first) * np.cos(second) * cos_open)
                omega = (q_phase + flip - at_outer) / RAD
                chi = (middle_zero + hand * opening) / RAD
                phi = (at_inner + flip + (0.0 if side > 0 else np.pi) - carried_phase) / RAD
                choice.offer(omega, chi, phi, two_theta, detector_clearance)
    return choice.verdicts(sin_theta, detector), choice


def short(node, wavelength):
    """Four settings by the formulas of a Eulerian cradle with omega, phi and 2theta about y and chi about z."""
    length = np.linalg.norm(node, axis=0)
    sin_theta = 0.5 * wavelength * length
    theta = np.arcsin(np.minimum(sin_theta, 1.0)) / RAD
    chi = np.arcsin(-node[1] / length) / RAD
    phi = np.arctan2(node[2], node[0]) / RAD
    choice = Choice(node.shape[1])
    for sign in (1.0, -1.0):
        two_theta = sign * 2 * theta
        detector_clearance = clearance(two_theta, LIMITS['two_theta'])
        # At negative detector angles Q points the other way along x: half a turn of omega brings it there.
        omega = theta if sign > 0 else 180.0 - theta
        choice.offer(omega, chi, phi, two_theta, detector_clearance)
        choice.offer(omega + 180.0, -chi, phi + 180.0, two_theta, detector_clearance)
    return choice.verdicts(sin_theta, 2 * theta), choice


def forward_error(node, readings, wavelength):
    """|R node - Q| / |node| with R and Q from the readings alone."""
    omega, chi, phi, two_theta = readings
    r = rotation(OMEGA, omega) @ rotation(CHI, chi) @ rotation(PHI, phi)
    q = (rotation(TWO_THETA, two_theta) @ [0, 0, 1.0] - [0, 0, 1.0]) / wavelength
    return np.linalg.norm(r @ node - q) / np.linalg.norm(node)


def check(node, wavelength):
    node = node[:, 0.5 * wavelength * np.linalg.norm(node, axis=0) <= 1]
    results = [road(node, wavelength) for road in (eight, short)]
    assert (results[0][0] == results[1][0]).all(), 'both roads give the same verdicts'
    sample = np.random.default_rng(1).choice(node.shape[1], 4000, replace=False)
    for verdict, choice in results:
        worst = max(forward_error(node[:, i], choice.readings[:, i], wavelength) for i in sample)
        assert worst < 1e-7, worst            # arccos of the general road loses half the digits at chi = 0 and 180
    offers = []
    keep, Choice.offer = Choice.offer, lambda self, *readings: offers.append(np.array(readings[:4]))
    few = node[:, sample[:500]]
    eight(few, wavelength)
    Choice.offer = keep
    assert len(offers) == 8
    worst = max(forward_error(few[:, i], offer[:, i], wavelength) for offer in offers for i in range(few.shape[1]))
    assert worst < 1e-7, worst
    for i in range(few.shape[1]):
        settings = {tuple(np.round((offer[:3, i] % 360) * 1e4) % 3600000) + (np.sign(offer[3, i]),) for offer in offers}
        assert len(settings) == 8, settings
    print(f'check passed: {len(sample)} chosen settings and all eight of {few.shape[1]} nodes, worst misfit {worst:.1e}')


def main():
    options = argparse.ArgumentParser()
    options.add_argument('--short', action='store_true')
    options.add_argument('--runs', type=int, default=5)
    options.add_argument('--wavelength', type=float, default=0.71)
    options.add_argument('--check', action='store_true')
    options = options.parse_args()
    hkl = indices()
    road, wavelength = short if options.short else eight, options.wavelength
    # The clock covers UB h as well as everything after it; the first round warms up.
    verdict, choice = road(U @ hkl / A, wavelength)
    if options.check:
        check(U @ hkl / A, wavelength)
    wall, cpu = [], []
    for _ in range(options.runs):
        start, start_cpu = time.perf_counter(), time.process_time()
        verdict, choice = road(U @ hkl / A, wavelength)
        wall.append(time.perf_counter() - start)
        cpu.append(time.process_time() - start_cpu)
    count = [int((verdict == v).sum()) for v in (REACHABLE, OVER_LIMIT, DIRECT_BEAM, OUTSIDE)]
    assert sum(count) == hkl.shape[1]
    checksum = choice.merit[verdict == REACHABLE].sum()
    print(f'{road.__name__} {statistics.median(wall):.3f} reachable {count[0]} over_limit {count[1]} direct_beam {count[2]} outside_sphere {count[3]} '
          f'clearance_sum {checksum:.9e} nodes {hkl.shape[1]} cpu {statistics.median(cpu):.3f}')


if __name__ == '__main__':
    main()

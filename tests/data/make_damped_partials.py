#!/usr/bin/env python3
"""Makes damped-partials.txt: sounds whose partials are known from elsewhere, for the test of the meter.

Needs numpy and scipy; run as `python3 make_damped_partials.py` in this folder. The result is committed, so the
tests themselves need neither.

chain    A chain of six masses on springs and dashpots, struck once. Its motion is stepped by the matrix
         exponential (scipy.linalg.expm); its partials come from the eigenvalues of the same system
         (scipy.linalg.eig): frequency, decay rate and amplitude of each.
noisy    Three damped sinusoids and white noise 40 dB under the strongest. Its truth is what the maximum-likelihood fit by
         scipy.optimize.least_squares finds in exactly these samples, all three partials together.
"""

import numpy as np
from scipy.linalg import eig, expm
from scipy.optimize import least_squares

RATE = 8000.0
COUNT = 2400


def chain():
    masses = np.array([1.0, 1.3, 0.8, 1.1, 0.9, 1.2])
    springs = 1.9e7 * np.array([1.0, 0.9, 1.1, 0.8, 1.2, 1.0, 0.95])
    dashpots = np.array([2.0, 9.0, 4.0, 6.0, 3.0, 8.0, 5.0])

    def banded(values):
        return np.diag(values[:-1] + values[1:]) - np.diag(values[1:-1], 1) - np.diag(values[1:-1], -1)

    size = len(masses)
    system = np.zeros((2 * size, 2 * size))
    system[:size, size:] = np.eye(size)
    system[size:, :size] = -banded(springs) / masses[:, None]
    system[size:, size:] = -banded(dashpots) / masses[:, None]
    start = np.zeros(2 * size)
    start[size] = 1.0  # the first mass is struck
    listen = np.zeros(2 * size)
    listen[2 * size - 2] = 1.0  # the last mass but one is heard, its velocity

    step = expm(system / RATE)
    state, sound = start, np.empty(COUNT)
    for i in range(COUNT):
        sound[i] = listen @ state
        state = step @ state

    values, vectors = eig(system)
    weights = (listen @ vectors) * np.linalg.solve(vectors, start.astype(complex))
    partials = [(v.imag / (2 * np.pi), -v.real, 2 * abs(w)) for v, w in zip(values, weights) if v.imag > 0]
    return sound, sorted(partials)


def noisy():
    true = np.array([[640.0, 6.0, 1.0, 0.3], [1290.0, 11.0, 0.6, 1.1], [1955.0, 17.0, 0.4, -0.7]])
    time = np.arange(COUNT) / RATE

    def model(unknowns):
        rows = unknowns.reshape(-1, 4)
        return sum(a * np.exp(-s * time) * np.cos(2 * np.pi * f * time + p) for f, s, a, p in rows)

    sound = model(true.ravel()) + 0.01 * np.random.default_rng(20).standard_normal(COUNT)
    scale = np.tile([1e-3, 1e-1, 1e-2, 1e-2], len(true))
    fit = least_squares(lambda u: model(true.ravel() + u * scale) - sound, np.zeros(true.size),
                        method="lm", xtol=1e-14, ftol=1e-14, gtol=1e-14)
    found = (true.ravel() + fit.x * scale).reshape(-1, 4)
    return sound, [tuple(row[:3]) for row in found]


def write(file, name, sound, partials):
    file.write(f"sound {name} {RATE:.17g} {len(partials)} {len(sound)}\n")
    for frequency, decay_rate, amplitude in partials:
        file.write(f"{frequency:.17g} {decay_rate:.17g} {amplitude:.17g}\n")
    file.writelines(f"{sample:.17g}\n" for sample in sound)


with open("damped-partials.txt", "w", encoding="ascii") as out:
    write(out, "chain", *chain())
    write(out, "noisy", *noisy())

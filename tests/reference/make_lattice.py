"""Make the generating vector of the lattice in `digestplan/kinetics/lattice.py`.

Run ``python -m tests.reference.make_lattice``: it searches, component by component, among random
odd candidates for the one with the least worst-case error (Sloan and Reztsov 2002: product weights,
periodic kernel), averaged over lattices of 2^8 to 2^15 points, so that any number of draws is
served.
"""

import numpy as np

DIMENSIONS, CANDIDATES, SIZES = 96, 500, range(8, 16)


def reversed_bits(n: int) -> np.ndarray:
    """Van der Corput sequence in base 2: the order in which the lattice is filled."""
    index, result, place = np.arange(n), np.zeros(n), 0.5
    while index.any():
        result += place * (index & 1)
        index >>= 1
        place /= 2
    return result


def main() -> None:
    """Print the vector."""
    rng = np.random.default_rng(20261201)
    points = reversed_bits(2 ** SIZES[-1])
    product = np.ones_like(points)
    vector = []
    for dimension in range(DIMENSIONS):
        weight = 0.5 / (1 + dimension / 10) ** 1.5
        candidates = [1] if dimension == 0 else rng.integers(0, 2**16, CANDIDATES) * 2 + 1
        best = None
        for z in candidates:
            x = points * z % 1.0
            trial = product * (1 + weight * 2 * np.pi**2 * (x * x - x + 1 / 6))
            errors = [abs(trial[: 2**m].mean() - 1) * 2**m for m in SIZES]
            score = float(np.mean(np.log(errors)))
            if best is None or score < best[0]:
                best = (score, int(z), trial)
        product = best[2]
        vector.append(best[1])
    print(vector)


if __name__ == "__main__":
    main()

"""Size of the goodness-of-fit p-values on dependent data, and the time that 2,000 draws take.

    python -m tests.bench.goodness [--samples 400] [--draws 199] [--seed 7]

The data are Laplace in truth, so a test at 5 % should reject 5 of 100. Three kinds of months:
independent; the exact autoregression .5 with Laplace marginals, whose shocks are zero with
probability .25 (Dewald and Lewis 1985, from memory) and whose dependence is not the one that the
sieve assumes; and normal scores that follow an autoregression .5, or .9.
For comparison: the same statistics held against independent draws.
"""

import argparse
import time

import numpy as np
from scipy.signal import lfilter
from scipy.special import ndtr

from analytics.goodness import goodness_of_fit


def independent(n, rng):
    return rng.laplace(size=n)


def laplace_autoregression(n, rng, rho=0.5):
    shocks = rng.laplace(size=n + 200) * (rng.random(n + 200) >= rho**2)
    return lfilter([1.0], [1.0, -rho], shocks)[200:]


def copula_autoregression(n, rng, rho=0.5):
    z = lfilter([1.0], [1.0, -rho], rng.standard_normal(n + 400))[400:] * np.sqrt(1 - rho**2)
    u = ndtr(z)
    return np.where(u < 0.5, np.log(2 * u), -np.log(2 - 2 * u))


def strong_autoregression(n, rng):
    return copula_autoregression(n, rng, 0.9)


PROCESSES = {
    "independent": independent,
    "Laplace autoregression .5": laplace_autoregression,
    "normal scores autoregression .5": copula_autoregression,
    "normal scores autoregression .9": strong_autoregression,
}


def main() -> None:
    """Print rejection rates at 5 % and the time of one full bootstrap."""
    parser = argparse.ArgumentParser()
    parser.add_argument("--samples", type=int, default=400)
    parser.add_argument("--draws", type=int, default=199)
    parser.add_argument("--n", type=int, default=300)
    parser.add_argument("--seed", type=int, default=7)
    given = parser.parse_args()
    print(f"{given.samples} samples of {given.n}, {given.draws} draws, share rejected at 5 %")
    for name, draw in PROCESSES.items():
        for dependent in (True, False):
            rejected = np.zeros(3)
            for sample in range(given.samples):
                values = draw(given.n, np.random.default_rng([given.seed, sample]))
                found = goodness_of_fit(
                    values, family="laplace", draws=given.draws, seed=sample, dependent=dependent
                )
                rejected += [
                    found.p_anderson_darling <= 0.05,
                    found.p_cramer_von_mises <= 0.05,
                    found.p_kolmogorov <= 0.05,
                ]
            share = rejected / given.samples
            against = "sieve" if dependent else "independent draws"
            print(
                f"{name:32s} {against:18s} A2 {share[0]:.3f}  W2 {share[1]:.3f}  D {share[2]:.3f}"
            )
    values = laplace_autoregression(800, np.random.default_rng(given.seed))
    for family in ("laplace", "asymmetric_laplace", "normal", "student_t"):
        start, busy = time.perf_counter(), time.process_time()
        goodness_of_fit(values, family=family)
        took, busy = time.perf_counter() - start, time.process_time() - busy
        print(f"2,000 draws of 800, {family}: {took:.2f} s, of the processor {busy:.2f} s")


if __name__ == "__main__":
    main()

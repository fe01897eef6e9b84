"""Size of the goodness-of-fit p-values on dependent data, and the time that 2,000 draws take.

    python -m tests.bench.goodness [--samples 400] [--draws 199] [--seed 7]

The data are Laplace in truth, so a test at 5 % should reject 5 of 100. Three kinds of months:
independent; the exact autoregression .5 with Laplace marginals, whose shocks are zero with
probability .25 (Dewald and Lewis 1985, from memory) and whose dependence is not the one that the
sieve assumes; and normal scores that follow an autoregression .5, or .9.
For comparison: the same statistics held against independent draws. With `--samples 0`, the times
alone.
"""

import argparse
import time

import numpy as np
from scipy.signal import lfilter
from scipy.special import ndtr

from analytics.families import FAMILIES
from analytics.goodness import goodness_of_fit
from app.demo import demo_releases
from app.server import build_app
from app.workspace import Workspace


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


def through_the_page() -> None:
    """Ask for 2,000 draws chunk by chunk as the Reading page does, and print what each family took.

    Progress comes with every chunk, and to cancel is not to ask for the next.
    """
    client = build_app(Workspace(placeholder=demo_releases())).server.test_client()
    for family in FAMILIES:
        walls: list[float] = []
        busy, total = time.process_time(), 0
        while len(walls) < (total or 1):
            start = time.perf_counter()
            answer = client.get(f"/reading/work/goodness?family={family}&draws=2000")
            walls.append(time.perf_counter() - start)
            total = answer.json["total"]
            assert answer.status_code == 200 and answer.json["done"] == len(walls)
        print(
            f"2,000 draws through the page, 801 months, {family}: {sum(walls):.2f} s, of the"
            f" processor {time.process_time() - busy:.2f} s; {total} chunks, the longest"
            f" {1e3 * max(walls):.0f} ms"
        )


def main() -> None:
    """Print rejection rates at 5 % and the time of one full bootstrap."""
    parser = argparse.ArgumentParser()
    parser.add_argument("--samples", type=int, default=400)
    parser.add_argument("--draws", type=int, default=199)
    parser.add_argument("--n", type=int, default=300)
    parser.add_argument("--seed", type=int, default=7)
    given = parser.parse_args()
    print(f"{given.samples} samples of {given.n}, {given.draws} draws, share rejected at 5 %")
    for name, draw in PROCESSES.items() if given.samples else ():
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
    through_the_page()
    values = laplace_autoregression(800, np.random.default_rng(given.seed))
    for family in FAMILIES:
        start, busy = time.perf_counter(), time.process_time()
        goodness_of_fit(values, family=family)
        took, busy = time.perf_counter() - start, time.process_time() - busy
        print(f"2,000 draws of 800, {family}: {took:.2f} s, of the processor {busy:.2f} s")


if __name__ == "__main__":
    main()

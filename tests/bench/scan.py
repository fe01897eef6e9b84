"""Speed, memory and hits of the scan: ``python -m tests.bench.scan``.

Pairs per second on one and two processes (from the first pair that comes back to the last, so that
the start of the processes does not count), processor time a pair, the largest worker, and what that
makes of 200 economies with 6 pairs each. Then the bundled panel of thirty economies against the
truth it was made from, and with ``--redraws N`` as many panels drawn anew from the same plans: one
panel is one draw, and says little about how often the scan is right.
"""

import argparse
import csv
import resource
import sys
import time
from dataclasses import replace

import numpy as np

from analytics.panel import PanelScan, panel_result
from analytics.series import Series
from app.compute import Bridge
from app.demo import demo_panel
from app.intake.reading import Release
from app.places import bundled
from app.scan.bridge import draws, question
from app.scan.workers import local_pool, scanned, usual_processes
from app.state import ViewState
from app.workspace import Workspace
from data_samples.panel import PANEL_MONTHS, PLANS, panel

MANY = 200 * 6
QUESTIONS = {
    "as it opens: either sign, every shift": {},
    "positive only, driver leading": {"sign": "positive", "shifts": "0:60"},
}


def bundled_panel():
    return Workspace((demo_panel(),))


def redrawn(seed):
    """A panel from the same plans and another seed, with levels as they are, not rounded."""
    series = []
    for made in panel(np.random.default_rng(seed)):
        for name, values in (("Broad money", made.money), ("Consumer prices", made.prices)):
            series.append(Series(f"{made.plan.economy}: {name}", PANEL_MONTHS[0], values))
    return Workspace((Release("panel.csv", tuple(series), ()),))


def truth():
    """Economies with a planted relation, as the truth file has them."""
    with (bundled("data_samples") / "truth.csv").open(encoding="utf-8") as file:
        return {row["economy"] for row in csv.DictReader(file) if row["relation"] == "yes"}


def children():
    """Processor seconds and largest memory, in megabytes, of the processes ended so far."""
    used = resource.getrusage(resource.RUSAGE_CHILDREN)
    return used.ru_utime + used.ru_stime, used.ru_maxrss / 1024


def speed(pairs, asked, processes):
    """Pairs a second between the first and the last that come back; processor time a pair."""
    before = children()[0]
    times = [time.perf_counter() for _ in scanned(pairs, asked, local_pool(processes))]
    return (len(times) - processes) / (times[-1] - times[processes - 1]), (
        children()[0] - before
    ) / len(pairs)


def measure_speed(count, surrogates):
    state = replace(ViewState(), surrogates=surrogates)
    pairs = question(state, Bridge(bundled_panel())).pairs[:count]
    asked = draws(state)
    one, cost = speed(pairs, asked, 1)
    two, cost_of_two = speed(pairs, asked, 2)
    print(f"{count} pairs of 479 months, {surrogates} surrogates, 60 windows, 97 shifts")
    for what, figure, digits in (
        ("pairs a second, 1 process", one, 3),
        ("pairs a second, 2 processes", two, 3),
        ("efficiency of 2 processes (1 = twice as fast)", two / one / 2, 2),
        ("processor seconds a pair, start included, 1 process", cost, 2),
        ("processor seconds a pair, start included, 2 processes", cost_of_two, 2),
        ("efficiency of 2 processes by processor time", cost / cost_of_two, 2),
        ("memory of the largest worker, MB", children()[1], 0),
        (f"{MANY} pairs (200 x 6), 1 process, minutes", MANY / one / 60, 0),
        (f"{MANY} pairs (200 x 6), 2 processes, minutes", MANY / two / 60, 0),
        (f"{MANY} pairs (200 x 6), processor minutes", MANY * cost / 60, 0),
    ):
        print(f"{what:56}{figure:10.{digits}f}")


def panel_of(desk, fields, surrogates) -> PanelScan:
    state = replace(ViewState(), surrogates=surrogates, **fields)
    asked = question(state, Bridge(desk))
    return asked.result(list(scanned(asked.pairs, draws(state), local_pool(usual_processes()))))


def hits(found: PanelScan, related):
    """For each correction: misses and false alarms."""
    assert panel_result(found.pairs).p_scan.tolist() == found.p_scan.tolist()
    judged = {}
    for name, p in (("Benjamini-Hochberg", found.p_scan), ("Holm", found.p_holm)):
        named = {scan.economy for scan, each in zip(found.pairs, p, strict=True) if each <= 0.05}
        judged[name] = sorted(related - named), sorted(named - related)
    return judged


def measure_hits(surrogates, redraws):
    related = truth()
    assert related == {plan.economy for plan in PLANS if plan.slope}
    for what, fields in QUESTIONS.items():
        print(f"\n{what}; {surrogates} surrogates; {len(related)} of 30 economies are related")
        found = panel_of(bundled_panel(), fields, surrogates)
        for name, (missed, false) in hits(found, related).items():
            print(
                f"  bundled panel, {name:18} found {len(related) - len(missed)}; missed:"
                f" {', '.join(missed) or 'none'}; false alarms: {', '.join(false) or 'none'}",
                flush=True,
            )
        sums = {}
        for seed in range(1, redraws + 1):
            for name, (missed, false) in hits(
                panel_of(redrawn(seed), fields, surrogates), related
            ).items():
                sums.setdefault(name, []).append((len(missed), len(false)))
        for name, counts in sums.items():
            missed, false = np.mean(counts, axis=0)
            some = np.mean([false > 0 for _, false in counts])
            print(
                f"  {redraws} panels drawn anew, {name:18} found {len(related) - missed:.1f} of"
                f" {len(related)}, false alarms {false:.2f} a panel, any in {some:.0%} of panels",
                flush=True,
            )


def main(arguments=None):
    parser = argparse.ArgumentParser(prog="python -m tests.bench.scan")
    parser.add_argument("--pairs", type=int, default=12, help="pairs whose speed is measured")
    parser.add_argument("--surrogates", type=int, default=2000)
    parser.add_argument("--redraws", type=int, default=0, help="panels drawn anew")
    parser.add_argument("--only", choices=("speed", "hits"), help="one of the two parts")
    chosen = parser.parse_args(arguments)
    if chosen.only != "hits":
        measure_speed(chosen.pairs, chosen.surrogates)
    if chosen.only != "speed":
        measure_hits(chosen.surrogates, chosen.redraws)
    return 0


if __name__ == "__main__":
    sys.exit(main())

"""A scan from beginning to end, as the command runs it."""

from collections.abc import Callable
from contextlib import closing
from pathlib import Path

from analytics.panel import PairScan, PanelScan, pair_fingerprint
from app.compute import Bridge
from app.scan.bridge import draws, question
from app.scan.result_file import ResultFile
from app.scan.workers import cluster_pool, local_pool, scanned, usual_processes
from app.state import ViewState


def completed_panel(
    state: ViewState,
    bridge: Bridge,
    *,
    result: Path | None = None,
    processes: int | None = None,
    cluster: str | None = None,
    told: Callable[[int, int], None] = lambda _done, _total: None,
) -> PanelScan:
    """Search every pair that `result` does not hold yet, and put all together.

    `told` is called with the pairs done and all pairs, at first and after each one.

    Raises
    ------
    ValueError
        There is no pair, the result file is of another question, or the workers fail; one
        sentence. Pairs that were done stay in the result file.
    """
    asked = question(state, bridge)
    wanted = {one.names: one.fingerprint for one in asked.refused}
    wanted |= {pair.names: pair_fingerprint(pair) for pair in asked.pairs}
    kept = ResultFile(result, asked.settings, wanted) if result else None
    done: dict[tuple[str, str, str], PairScan] = {
        scan.names: scan for scan in (kept.known if kept else ())
    }
    left = [pair for pair in asked.pairs if pair.names not in done]
    told(len(asked.pairs) - len(left), len(asked.pairs))
    if left:
        pool = (
            cluster_pool(cluster)
            if cluster
            else local_pool(min(processes or usual_processes(), len(left)))
        )
        with closing(scanned(left, draws(state), pool)) as scans:
            for scan in scans:
                done[scan.names] = scan
                if kept:
                    kept.add(scan)
                told(sum(pair.names in done for pair in asked.pairs), len(asked.pairs))
    panel = asked.result(list(done.values()))
    if kept:
        kept.finish(panel)
    return panel

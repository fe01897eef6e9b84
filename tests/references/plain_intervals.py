"""Scale and degrees of freedom of past errors, for one moment, by their definition."""

import numpy as np


def plain_error_scale(errors, horizon, newest=0.6):
    """Root mean square of the newest errors, and what they are worth in independent squares."""
    used = np.asarray(errors)[len(errors) - int(np.ceil(newest * len(errors))) :]
    n = used.size
    squares = used @ used
    inflation = 1.0
    for lag in range(1, 2 * horizon + 1):
        if lag <= n / 3:
            inflation += 2 * (1 - lag / n) * ((used[lag:] @ used[:-lag]) / squares) ** 2
    return np.sqrt(squares / n), max(2.0, n / inflation)

"""A chained index, contributions and core measures as they are defined: loops, no arrays, slow."""


def plain_index(prices, shares, links):
    """Cost of the basket, month by month; at each link the money of the day buys a new one.

    Complete prices only. Returns the index (None before the first link) and, for each month, the
    quantities held when it began.
    """
    index, held = [None] * len(prices), [None] * len(prices)
    index[links[0]] = 100.0
    quantities = None
    for t in range(links[0], len(prices)):
        if t > links[0]:
            held[t] = quantities
            index[t] = sum(q * p for q, p in zip(quantities, prices[t], strict=True))
        if t in links:
            row = shares[links.index(t)]
            whole = sum(row)
            quantities = [index[t] * w / whole / p for w, p in zip(row, prices[t], strict=True)]
    return index, held


def plain_contributions(prices, shares, links, span):
    """Rate of the index and each component's points, one pair of months at a time."""
    index, held = plain_index(prices, shares, links)
    rates, parts = [None] * len(prices), [None] * len(prices)
    for t in range(links[0] + span, len(prices)):
        base = index[t - span]
        rates[t] = 100.0 * (index[t] - base) / base
        parts[t] = [
            100.0
            * sum(
                held[u][i] * (prices[u][i] - prices[u - 1][i]) for u in range(t - span + 1, t + 1)
            )
            / base
            for i in range(len(prices[0]))
        ]
    return rates, parts


def two_link_formula(old, old_link, old_month, new, new_month):
    """Ribe's formula over one link: short links I' (old) and I (new), weights w' and w."""
    level = sum(w * i for w, i in zip(old, old_month, strict=True))
    at_link = sum(w * i for w, i in zip(old, old_link, strict=True))
    return [
        100.0 * (w0 * (link - month) / level + at_link / level * w1 * (i - 1.0))
        for w0, link, month, w1, i in zip(old, old_link, old_month, new, new_month, strict=True)
    ]


def plain_median(changes, weights):
    """Walk up the sorted changes until half of the weight is passed."""
    pairs = sorted((c, w) for c, w in zip(changes, weights, strict=True) if w > 0)
    half, passed = sum(w for _, w in pairs) / 2, 0.0
    for place, (change, weight) in enumerate(pairs):
        passed += weight
        if abs(passed - half) < 1e-12 and place + 1 < len(pairs):
            return (change + pairs[place + 1][0]) / 2
        if passed > half:
            return change
    return pairs[-1][0]


def plain_trimmed(changes, weights, lower, upper):
    """Cut weight from both ends of the sorted list, piece by piece."""
    pairs = sorted([c, w] for c, w in zip(changes, weights, strict=True))
    whole = sum(w for _, w in pairs)
    for cut, order in ((lower, pairs), (upper, pairs[::-1])):
        left = whole * cut / 100
        for pair in order:
            taken = min(left, pair[1])
            pair[1] -= taken
            left -= taken
    return sum(c * w for c, w in pairs) / sum(w for _, w in pairs)

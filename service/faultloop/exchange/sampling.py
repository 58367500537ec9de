"""What a sample shows, and does not show, of the whole."""

import math


def greatest_bad(population: int, tested: int, bad: int, confidence_percent: int = 95) -> int:
    """Largest number of bad points in a population that a sample does not rule out.

    Parameters
    ----------
    population : int
        Number of points that there are.
    tested : int
        Number of points picked at random and tested, at most `population`.
    bad : int
        Number of bad points among those tested.
    confidence_percent : int
        One-sided confidence [%].

    Returns
    -------
    int
        Largest number D of bad points in the population for which a sample with `bad` or fewer of them still has
        a probability of at least 100 % - `confidence_percent`.

    Raises
    ------
    ValueError
        If the numbers cannot belong together.

    Notes
    -----
    Sampling without replacement: P(X <= bad | D) = sum over x of C(D, x) C(N - D, n - x) / C(N, n) (hypergeometric
    distribution), in whole numbers. With none bad it is C(N - D, n) / C(N, n) [1]_.

    References
    ----------
    .. [1] Textbook mathematics (hypergeometric upper confidence bound); source = "memory".
    """
    if not 0 <= bad <= tested <= population or not 0 < confidence_percent < 100:
        raise ValueError("0 <= bad <= tested <= population and 0 < confidence_percent < 100 are expected")
    risk, ways = 100 - confidence_percent, math.comb(population, tested)
    least, most = bad, population - tested + bad
    while least < most:
        middle = (least + most + 1) // 2
        if 100 * _ways(population, tested, bad, middle) >= risk * ways:
            least = middle
        else:
            most = middle - 1
    return least


def _ways(population: int, tested: int, bad: int, all_bad: int) -> int:
    """Number of samples that hold at most `bad` of `all_bad` bad points; each term follows from the one before."""
    good = population - all_bad
    first = max(0, tested - good)
    if first > bad:
        return 0
    term = total = math.comb(all_bad, first) * math.comb(good, tested - first)
    for x in range(first, min(bad, all_bad)):
        term = term * (all_bad - x) * (tested - x) // ((x + 1) * (good - tested + x + 1))
        total += term
    return total

"""The points of a study: the whole grid of its values, or a low-discrepancy set over its ranges.

A point holds a value for every key of the study. Points of a set of n are the first n of any larger
one with the same seed, so that a study can go on with more. Which value a share of 0 to 1 stands
for says `value_at`; the search uses it too.
"""

import math
from collections.abc import Iterator, Sequence
from itertools import product
from statistics import NormalDist

from .study import Study, StudyKey, Value, Values

DIGITS = 9  # significant, of a value of a range without steps: as many as a design file gets


def points_of(study: Study) -> Sequence[Values]:
    """The values of every point, in the order in which they are computed."""
    if study.sampling.kind == "grid":
        return list(_grid(study.keys))
    return list(_set(study))


def counted(study: Study) -> int:
    """How many points there are."""
    if study.sampling.kind != "grid":
        return study.sampling.designs
    return math.prod(len(key.values or ()) for key in study.keys)


def value_at(key: StudyKey, share: float) -> Value:
    """The value of a key below which lies a share from 0 to 1 of its distribution."""
    values = key.values
    if key.low is None or key.high is None or key.distribution == "even":
        if values is not None:
            return values[min(int(share * len(values)), len(values) - 1)]
        assert key.low is not None
        assert key.high is not None
        return _rounded(key, key.low + share * (key.high - key.low))
    assert key.mean is not None
    assert key.deviation is not None
    law = NormalDist(key.mean, key.deviation)
    least, most = law.cdf(key.low), law.cdf(key.high)
    within = least + share * (most - least)
    # inv_cdf has no ends; beyond the last number before them the limit is meant.
    drawn = law.inv_cdf(within) if 0.0 < within < 1.0 else (key.low if share < 0.5 else key.high)
    drawn = min(max(drawn, key.low), key.high)
    if values is None:
        return _rounded(key, drawn)
    return min(values, key=lambda value: abs(float(value) - drawn))


def _rounded(key: StudyKey, value: float) -> Value:
    return round(value) if key.whole else float(f"{value:.{DIGITS}g}")


def _grid(keys: Sequence[StudyKey]) -> Iterator[Values]:
    names = [key.key for key in keys]
    for row in product(*(key.values or () for key in keys)):
        yield dict(zip(names, row, strict=True))


def _set(study: Study) -> Iterator[Values]:
    from scipy.stats import qmc

    sampling = study.sampling
    kind = {"sobol": qmc.Sobol, "halton": qmc.Halton}[sampling.kind]
    engine = kind(d=len(study.keys), scramble=True, seed=sampling.seed)
    # A power of two at a time, as Sobol's set wants; of a longer set it is the beginning.
    shares = engine.random(2 ** math.ceil(math.log2(max(sampling.designs, 2))))
    for row in shares[: sampling.designs].tolist():
        values = (value_at(key, share) for key, share in zip(study.keys, row, strict=True))
        yield dict(zip((key.key for key in study.keys), values, strict=True))

"""Speed of the walk of a graph, beside outer-product updates of a matrix of its size in the same run."""

import statistics
import time
from collections.abc import Callable

import numpy as np

from beforehand.multiplicity.graph import Graph, walk

M = 200
ROUNDS = 9
MOST = 1.5
"""Asked for when the walk was designed: it makes 200 updates of a matrix that shrinks, and chooses a node at each."""


def seconds(job: Callable[[], object]) -> float:
    began = time.process_time()
    job()
    return time.process_time() - began


def test_two_hundred_hypotheses_that_all_pass_on_to_all() -> None:
    random = np.random.default_rng(62)
    passes = random.random((M, M))
    np.fill_diagonal(passes, 0)
    passes /= passes.sum(axis=1, keepdims=True)
    weights, p, passing = np.full(M, 1 / M), random.random(M) ** 4, np.full(M, True)

    def updates() -> None:
        for i in range(M):
            passes + np.outer(passes[:, i], passes[i])

    def adjusted() -> None:
        walk(Graph.of(weights, passes), p, passing=passing)

    # in turns, so that a busy machine slows both alike
    rounds = [(seconds(updates), seconds(adjusted)) for _ in range(ROUNDS)]
    update, adjust = (statistics.median(each) for each in zip(*rounds, strict=True))
    print(f"\ngraph of {M}: {adjust / update:.2f} of {M} outer-product updates ({update * 1e3:.0f} ms)")
    assert adjust / update <= MOST

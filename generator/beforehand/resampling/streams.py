"""Streams of chance: the same seed and name give the same draws, on any machine and in any order of work."""

import hashlib
from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
from numpy.random import Philox, SeedSequence
from numpy.typing import NDArray

Words = NDArray[np.uint64]

BLOCK = 256
"""Draws that share one state of the generator: part of what a stream is, so it never changes."""
WORDS_AT_ONCE = 2**20  # 8 MB: how many words of a block are held at a time changes no draw


@dataclass(frozen=True, kw_only=True)
class Stream:
    """Draws that belong to a seed, a name and a stage, and to nothing else.

    Draw r of a stream lies in block r // 256. Each block has its own generator, Philox 4x64-10, whose key comes from
    the seed, the SHA-256 of the name, the stage and the number of the block: so any block can be drawn alone, the
    first draws of a longer run are those of a shorter one, and adding or reordering names moves no other draw. All
    draws are made from the raw bits of the generator, whose sequence numpy keeps for good (NEP 19); its methods for
    permutations and the like may change from one release to the next.

    Parameters
    ----------
    seed : int
        Any whole number from 0 on.
    name : str
        What the draws are for.
    stage : int
        Which of several uses under one name, from 0.

    Raises
    ------
    ValueError
        When the seed or the stage is negative, or the name is empty.

    References
    ----------
    Salmon, Moraes, Dror & Shaw (2011), Parallel random numbers: as easy as 1, 2, 3, Proceedings of the International
    Conference for High Performance Computing, article 16 (Philox).
    """

    seed: int
    name: str
    stage: int = 0

    def __post_init__(self) -> None:
        if self.seed < 0 or self.stage < 0:
            raise ValueError(f"a seed and a stage are whole numbers from 0 on; found {self.seed} and {self.stage}")
        if not self.name:
            raise ValueError("a stream of chance has a name; found none")

    def generator(self, block: int) -> Philox:
        """Give the generator of one block, at its beginning.

        Parameters
        ----------
        block : int
            The number of the block, from 0.
        """
        digest = hashlib.sha256(self.name.encode()).digest()
        words = np.frombuffer(digest, dtype=">u4").tolist()
        return Philox(SeedSequence(self.seed, spawn_key=(*words, self.stage, block)))

    def words(self, width: int, draws: int) -> Iterator[Words]:
        """Give the raw bits of the first draws.

        Parameters
        ----------
        width : int
            Words that one draw takes, at least 1.
        draws : int
            How many draws, at least 1.

        Yields
        ------
        ndarray of uint64, shape (rows, width)
            One row for each draw, in their order, as many rows at a time as fit in memory.

        Raises
        ------
        ValueError
            When width or draws is below 1.
        """
        if width < 1 or draws < 1:
            raise ValueError(f"there is at least one draw of at least one word; found {draws} of {width}")
        at_once = max(1, WORDS_AT_ONCE // width)
        for block, start in enumerate(range(0, draws, BLOCK)):
            generator, left = self.generator(block), min(BLOCK, draws - start)
            while left:
                rows = min(at_once, left)
                yield generator.random_raw(rows * width).reshape(rows, width)
                left -= rows

    def permutations(self, n: int, draws: int) -> Iterator[NDArray[np.intp]]:
        """Draw permutations of the places 0 to n - 1, all equally probable.

        A permutation is the order of n words; equal words, of probability below n² / 2^65, keep the order of their
        places. Parameters, rows and errors are those of ``words``, with n for the width.
        """
        for words in self.words(n, draws):
            yield np.argsort(words, axis=1, kind="stable")

    def signs(self, n: int, draws: int) -> Iterator[NDArray[np.bool_]]:
        """Draw n fair coins at a time: the highest bit of each of n words.

        Parameters, rows and errors are those of ``words``, with n for the width.
        """
        for words in self.words(n, draws):
            yield words >> np.uint64(63) == 1

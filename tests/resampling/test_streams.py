"""Streams of chance: pinned for good, prefixes of each other, and fair."""

import hashlib
import itertools
from collections import Counter
from typing import Any

import numpy as np
import pytest
from numpy.random import Philox, SeedSequence
from scipy import stats

from beforehand.resampling import streams
from beforehand.resampling.streams import BLOCK, Stream

STREAM = Stream(seed=20310511, name="valve_wear")

# Philox 4x64-10 in plain whole numbers: multipliers and increments of the key as in Salmon et al. (2011).
MULTIPLIERS = 0xD2E7470EE14C6C93, 0xCA5A826395121157
INCREMENTS = 0x9E3779B97F4A7C15, 0xBB67AE8584CAA73B
MASK = 2**64 - 1


def philox(counter: int, key: tuple[int, int]) -> list[int]:
    """One counter of four words, enciphered in ten rounds."""
    a, b, c, d = (counter >> 64 * place & MASK for place in range(4))
    for _ in range(10):
        one, other = MULTIPLIERS[0] * a, MULTIPLIERS[1] * c
        a, b, c, d = other >> 64 ^ b ^ key[0], other & MASK, one >> 64 ^ d ^ key[1], one & MASK
        key = (key[0] + INCREMENTS[0]) & MASK, (key[1] + INCREMENTS[1]) & MASK
    return [a, b, c, d]


def drawn(stream: Stream, draws: int, n: int = 7) -> Any:
    return np.vstack(list(stream.permutations(n, draws)))


def test_the_cipher_is_the_published_one() -> None:
    # known answers of the reference implementation (Random123, file kat_vectors, lines "philox4x64 10")
    zeros = [0x16554D9ECA36314C, 0xDB20FE9D672D0FDC, 0xD7E772CEE186176B, 0x7E68B68AEC7BA23B]
    ones = [0x87B092C3013FE90B, 0x438C3C67BE8D0224, 0x9CC7D7C69CD777B6, 0xA09CAEBF594F0BA0]
    for counter, key, answer in ((0, 0, zeros), (2**256 - 1, 2**128 - 1, ones)):
        assert philox(counter, (key & MASK, key >> 64)) == answer
        # numpy counts up before it enciphers
        assert Philox(counter=(counter - 1) % 2**256, key=key).random_raw(4).tolist() == answer


def test_a_block_is_keyed_by_seed_name_stage_and_number() -> None:
    digest = hashlib.sha256(b"valve_wear").hexdigest()
    name = [int(digest[i : i + 8], 16) for i in range(0, 64, 8)]
    key = SeedSequence(20310511, spawn_key=(*name, 3, 5)).generate_state(2, np.uint64).tolist()
    stream = Stream(seed=20310511, name="valve_wear", stage=3)
    words = stream.generator(5).random_raw(12).tolist()
    assert words == [word for counter in (1, 2, 3) for word in philox(counter, (key[0], key[1]))]


def test_pinned() -> None:
    # made once by this code with numpy 2.4.6: whoever changes these changes every report that drew
    first, last = next(STREAM.words(3, 1)), list(STREAM.words(3, 2 * BLOCK + 1))[-1]
    assert first.tolist() == [[11517734292901965456, 9141902591685002569, 6703466161616619556]]
    assert last.tolist() == [[8722745171359504361, 1978593896375116503, 15787220392842212198]]
    assert drawn(STREAM, 3).tolist() == [[5, 2, 3, 4, 1, 0, 6], [6, 4, 3, 1, 0, 5, 2], [4, 6, 1, 2, 5, 0, 3]]
    assert next(STREAM.signs(12, 1)).astype(int).tolist() == [[1, 0, 0, 0, 0, 0, 1, 1, 1, 1, 0, 0]]


def test_seed_sequences_are_the_published_ones() -> None:
    # values of the C++ reference of seed_seq_fe by M. E. O'Neill, as kept in numpy/random/tests/test_seed_sequence.py
    sequence = SeedSequence([3735928559, 195939070, 229505742, 305419896])
    assert sequence.generate_state(4).tolist() == [3914649087, 576849849, 3593928901, 2229911004]
    assert sequence.generate_state(2, np.uint64).tolist() == [2477551240072187391, 9577394838764454085]


@pytest.mark.parametrize("draws", [1, BLOCK - 1, BLOCK, BLOCK + 1, 3 * BLOCK + 7])
def test_a_longer_run_begins_with_the_shorter_one(draws: int) -> None:
    longer = drawn(STREAM, 4 * BLOCK)
    assert drawn(STREAM, draws).tolist() == longer[:draws].tolist()
    signs = np.vstack(list(STREAM.signs(5, 4 * BLOCK)))
    assert np.vstack(list(STREAM.signs(5, draws))).tolist() == signs[:draws].tolist()


def test_memory_changes_no_draw(monkeypatch: pytest.MonkeyPatch) -> None:
    before = drawn(STREAM, 300)
    for at_once in (1, 50, 7 * 100):
        monkeypatch.setattr(streams, "WORDS_AT_ONCE", at_once)
        assert drawn(STREAM, 300).tolist() == before.tolist()


def test_a_block_can_be_drawn_alone() -> None:
    alone = STREAM.generator(2).random_raw(BLOCK * 7).reshape(BLOCK, 7)
    assert drawn(STREAM, 3 * BLOCK)[2 * BLOCK :].tolist() == np.argsort(alone, kind="stable").tolist()


def test_other_seeds_names_stages_and_blocks_draw_otherwise() -> None:
    others = [
        Stream(seed=20310512, name="valve_wear"),
        Stream(seed=20310511, name="valve_wears"),
        Stream(seed=20310511, name="valve_wear", stage=1),
    ]
    first = {tuple(next(stream.words(4, 1))[0].tolist()) for stream in (STREAM, *others)}
    first |= {tuple(STREAM.generator(block).random_raw(4).tolist()) for block in (1, 2)}
    assert len(first) == 6


def test_permutations_are_permutations_and_equally_probable() -> None:
    draws = 24 * 1000
    counts = Counter(map(tuple, drawn(STREAM, draws, 4).tolist()))
    assert set(counts) == set(itertools.permutations(range(4)))
    # one seed, fixed: p of a fair stream would be below 0.001 for one seed in a thousand
    assert stats.chisquare(list(counts.values())).pvalue > 0.001


def test_coins_are_fair_and_independent() -> None:
    heads = np.vstack(list(STREAM.signs(6, 12_800)))
    assert stats.binomtest(int(heads.sum()), heads.size).pvalue > 0.001
    patterns = Counter(map(tuple, heads.tolist()))
    assert len(patterns) == 64
    assert stats.chisquare(list(patterns.values())).pvalue > 0.001


@pytest.mark.parametrize(
    ("settings", "message"),
    [
        ({"seed": -1}, "found -1 and 0"),
        ({"stage": -2}, "found 20310511 and -2"),
        ({"name": ""}, "a stream of chance has a name; found none"),
    ],
)
def test_refused_streams(settings: dict[str, Any], message: str) -> None:
    with pytest.raises(ValueError, match=message):
        Stream(**{"seed": 20310511, "name": "valve_wear", **settings})


@pytest.mark.parametrize(("width", "draws"), [(0, 5), (5, 0)])
def test_refused_draws(width: int, draws: int) -> None:
    with pytest.raises(ValueError, match=f"found {draws} of {width}"):
        next(STREAM.words(width, draws))

"""What is asked of a test, and what the sides mean."""

from typing import Any

import pytest

from beforehand.hypothesis_tests.sides import Asked


def asked(**settings: Any) -> Asked:
    return Asked(**({"null_value": 0.0, "alternative": "two_sided", "confidence": 0.95} | settings))


def test_the_level_that_was_typed_comes_back() -> None:
    # 1 - 0.95 is 0.050000000000000044 and 1 - 0.9 is 0.09999999999999998
    for level in (0.05, 0.1, 0.2, 0.01, 0.001, 1e-6):
        assert asked(confidence=1 - level).tail == level / 2


def test_a_p_on_the_level_is_rejected_and_outside_the_interval() -> None:
    # 1 of 20 arrangements, at 5 % per side
    assert not asked(confidence=0.9).keeps(1 / 20)
    assert asked(confidence=0.9, alternative="above").rejects(1 / 20)
    assert asked(confidence=0.9).rejects(2 / 20)
    assert not asked(confidence=0.9).rejects(2 / 20 + 1e-9)


def test_one_p_out_of_two() -> None:
    assert asked(alternative="above").p(above=0.01, below=0.99) == 0.01
    assert asked(alternative="below").p(above=0.01, below=0.99) == 0.99
    assert asked().p(above=0.01, below=0.99) == 0.02
    assert asked().p(above=0.6, below=0.7) == 1


@pytest.mark.parametrize(
    ("settings", "message"),
    [
        ({"alternative": "greater"}, "an alternative is above, below or two_sided; found 'greater'"),
        ({"confidence": 95.0}, "a confidence lies between 0 and 1; found 95.0"),
        ({"confidence": 1 - 2.0**-53}, "a confidence lies between 0 and 1; found 0.9999999999999999"),
        ({"null_value": float("nan")}, "a null value is a finite number; found nan"),
    ],
)
def test_refused(settings: dict[str, Any], message: str) -> None:
    with pytest.raises(ValueError) as refused:  # noqa: PT011  the whole message is compared
        asked(**settings)
    assert str(refused.value) == message

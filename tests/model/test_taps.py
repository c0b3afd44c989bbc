"""Taps in numbers and words, vector groups and their turning."""

import pytest
from msgspec.structs import replace

from app.model import taps
from app.model.kinds import Transformer

T = Transformer(start="", end="", v1_v=11000.0, v2_v=400.0)


def test_numbers_of_the_ladder():
    assert list(taps.notches(T)) == [-2, -1, 0, 1, 2]
    assert taps.factor(T, -1) == 0.975
    assert taps.nameplate_v(T, 1) == pytest.approx(11275.0, rel=1e-15)
    assert taps.ratio(T, 0) == 27.5
    on_two = replace(T, tapped="winding 2")
    assert taps.nameplate_v(on_two, -1) == 390.0
    assert taps.ratio(on_two, 2) == pytest.approx(11000 / 420, rel=1e-15)


@pytest.mark.parametrize(
    ("tapped", "notch", "fed", "words"),
    [
        ("winding 1", -1, 1, "tap −2.5 %: 10725/400, raises winding 2"),
        ("winding 1", 1, 1, "tap +2.5 %: 11275/400, lowers winding 2"),
        ("winding 1", 0, 1, "tap 0 %: 11000/400"),
        ("winding 2", 2, 1, "tap +5 %: 11000/420, raises winding 2"),
        ("winding 2", -2, 1, "tap −5 %: 11000/380, lowers winding 2"),
        ("winding 1", 1, 2, "tap +2.5 %: 11275/400, raises winding 1"),
        ("winding 2", 1, 2, "tap +2.5 %: 11000/410, lowers winding 1"),
    ],
)
def test_words_say_which_winding_moves_and_which_way(tapped, notch, fed, words):
    assert taps.words(replace(T, tapped=tapped), notch, fed) == words


@pytest.mark.parametrize(
    ("step", "notch", "words"),
    [(2.5, -1, "−2.5 %"), (0.625, -4, "−2.5 %"), (0.625, 3, "+1.875 %"), (1.1, 3, "+3.3 %"), (5, 0, "0 %")],
)
def test_a_notch_in_percent_has_the_digits_it_needs(step, notch, words):
    assert taps.percent_words(replace(T, notch_percent=step), notch) == words


@pytest.mark.parametrize("tapped", ["winding 1", "winding 2"])
@pytest.mark.parametrize("notch", [-2, -1, 1, 2])
def test_words_agree_with_the_ratio(tapped, notch):
    t = replace(T, tapped=tapped)
    raises = 1 / taps.ratio(t, notch) > 1 / taps.ratio(t, 0)
    assert ("raises winding 2" in taps.words(t, notch)) == raises
    assert ("raises winding 1" in taps.words(t, notch, 2)) == (taps.ratio(t, notch) > taps.ratio(t, 0))


def test_odd_volts_keep_a_decimal():
    assert taps.words(replace(T, v1_v=10972.0), 1) == "tap +2.5 %: 11246.3/400, lowers winding 2"


@pytest.mark.parametrize(
    "group", "Dyn11 Dyn5 Dyn1 Yzn11 Yzn5 Yyn0 Yd11 Yd1 YNyn0 YNd1 Dd0 Dz6 Ii0 Ii6".split()
)
def test_groups_of_the_standard_are_read(group):
    assert taps.group(group) is not None
    assert taps.turned_group(taps.turned_group(group)) == group


@pytest.mark.parametrize(
    "group", ["", "Dyn11 x", *"Dyn Dyn12 Dyn0 Yy1 Yd2 dyn11 DYN11 Iyn0 Di0 Ii3 Dyn011".split()]
)
def test_what_no_winding_can_do_is_not_read(group):
    assert taps.group(group) is None


def test_a_turned_transformer_is_the_same_seen_from_the_other_side():
    assert taps.turned_group("Dyn11") == "YNd1"
    assert taps.turned_group("Yyn0") == "YNy0"
    turned = taps.turned(replace(T, tap=-1))
    assert (turned.v1_v, turned.v2_v, turned.vector_group, turned.tapped) == (
        400.0,
        11000.0,
        "YNd1",
        "winding 2",
    )
    assert taps.ratio(turned, -1) == pytest.approx(1 / taps.ratio(T, -1), rel=1e-15)
    assert taps.turned(turned) == replace(T, tap=-1)

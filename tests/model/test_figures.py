"""Figures as people read them."""

from functools import partial

import pytest

from app.model import figures

NAN = float("nan")


@pytest.mark.parametrize(
    ("written", "shown"),
    [
        (figures.stated(0.8), "0.8"),
        (figures.stated(11000.0, "V"), "11\u202f000 V"),
        (figures.stated(0.1234567), "0.123457"),
        (figures.stated(-2.4999999999, "%", sign=True), "−2.5 %"),
        (figures.stated(NAN, "%"), "–"),
        (figures.level(11000.0), "11 kV"),
        (figures.level(230.0), "230 V"),
        (figures.ratio(11000.0, 400.0), "11/0.4 kV"),
        (figures.ratio(400.0, 230.0), "400/230 V"),
        (figures.closure(2.3e-9), "2·10⁻⁹"),
        (figures.closure(0.0), "0"),
        (figures.closure(0.25), "0.250"),
        (figures.closure(NAN), "–"),
    ],
)
def test_a_figure_is_written_as_the_trade_writes_it(written, shown):
    assert written == shown


@pytest.mark.parametrize(
    ("now", "then", "write", "shown"),
    [
        (10730.0, 10725.0, figures.volts, "▲ 5.0 V"),
        (374.0, 379.8, figures.volts, "▼ 5.8 V"),
        (1.60, 1.64, figures.loss, "▼ 40 W"),
        (1.6001, 1.6, figures.loss, ""),
        (NAN, 1.6, figures.loss, ""),
        (97.0, 95.0, partial(figures.percent, digits=2), "▲ 2.00 %"),
    ],
)
def test_a_change_is_written_with_the_unit_of_its_own_size(now, then, write, shown):
    assert figures.change(now, then, write) == shown

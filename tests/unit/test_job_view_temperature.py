"""What the status line and its tip say of a session's temperatures."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from linewright.job.view_session import unsolved_session
from linewright.job.view_temperature import long_text, short_text
from linewright.session.model import TemperatureReading
from linewright.spectra.spectrum import Segment, Spectrum


@pytest.fixture
def bare():
    wave = np.linspace(5000.0, 5010.0, 50)
    segment = Segment(wave, np.ones(50), None, np.zeros(50, dtype=bool))
    return unsolved_session(Spectrum((segment,), medium="air"))


def with_readings(session, *readings):
    return replace(session, temperature_k=readings[0].value, temperatures=readings)


def test_nothing_is_said_before_anything_is_known(bare):
    assert short_text(bare) == long_text(bare) == ""


def test_a_session_of_before_shows_its_bare_number(bare):
    assert short_text(replace(bare, temperature_k=5200.0)) == "T 5,200 K"


@pytest.mark.parametrize(
    ("label", "error", "text"),
    [
        ("adopted", 99.4, "T 5,086 ± 99 K"),
        ("adopted", np.nan, "T 5,086 K"),
        ("given", np.nan, "T 5,086 K given"),
        ("nominal", np.nan, "T 5,086 K nominal"),
    ],
)
def test_the_first_reading_is_shown_with_its_error_or_origin(bare, label, error, text):
    assert short_text(with_readings(bare, TemperatureReading(label, 5086.0, error))) == text


def test_every_reading_keeps_label_error_and_caveat(bare):
    colour = TemperatureReading("Planck colour", 6805.8, 796.8, note="of the continuum alone")
    hint = TemperatureReading("ionisation balance", 0.404, 0.18, "log10 dyn cm-2")
    first = TemperatureReading("adopted", 5086.3, 99.8, used=True)
    assert long_text(with_readings(bare, first, colour, hint)).splitlines() == [
        "adopted 5086 +- 100 K",
        "Planck colour 6806 +- 797 K (of the continuum alone)",
        "ionisation balance 0.40 +- 0.18",
    ]

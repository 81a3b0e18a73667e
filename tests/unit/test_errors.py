"""Refusals are one line and survive the way from a worker process."""

from __future__ import annotations

import pickle

from linewright.errors import InputRefused, MediumUnknown


def test_message_is_one_line_of_what_cause_and_cure():
    error = InputRefused("a.fits", "truncated\n at byte 80", "copy it again")
    assert str(error) == "a.fits: truncated at byte 80; copy it again"


def test_refusals_survive_pickling():
    error = pickle.loads(pickle.dumps(MediumUnknown("a.txt", "no medium", "say --medium air")))
    assert isinstance(error, MediumUnknown)
    assert (error.what, error.cause, error.cure) == ("a.txt", "no medium", "say --medium air")

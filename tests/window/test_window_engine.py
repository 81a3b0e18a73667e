"""The engine's process: results, refusals, progress, stopping, and no process left behind."""

from __future__ import annotations

import threading
import time

import pytest

from linewright.errors import Cancelled, InputRefused
from linewright.progress import Progress
from linewright.window.engine import Engine, EngineLost


@pytest.fixture
def engine():
    engine = Engine()
    yield engine
    engine.close()
    assert engine._child is None


def test_a_call_returns_what_the_core_returns(engine):
    from linewright.lines.species import normal_name

    assert engine.call("lines.species:normal_name", "fe1") == normal_name("fe1")
    child = engine._child
    assert engine.call("lines.species:normal_name", "[OIII]") == "[O III]"
    assert engine._child is child, "one process serves many calls"


def test_a_refusal_arrives_with_cause_and_cure(engine):
    with pytest.raises(InputRefused) as refusal:
        engine.call("lines.species:normal_name", "siii")
    assert refusal.value.cure and "could mean" in refusal.value.cause


def test_a_fault_arrives_with_its_traceback(engine):
    with pytest.raises(TypeError) as fault:
        engine.call("lines.species:normal_name", 1, 2, 3)
    assert "engine_child" in "".join(fault.value.__notes__)


def test_stopping_is_immediate_and_the_next_call_works(engine, invented):
    import window_builders as build

    from linewright.job.options import SolveOptions

    spectrum = build.spectrum_of(build.catalogue_of(3000, low=4000.0, high=8000.0),
                                 samples=400000)
    told, raised = [], []

    def work():
        try:
            engine.call("job.solve:solve", spectrum, None, SolveOptions(),
                        progress=Progress(lambda *report: told.append(report)))
        except BaseException as error:
            raised.append(error)

    thread = threading.Thread(target=work)
    thread.start()
    deadline = time.monotonic() + 60
    while len(told) < 2 and thread.is_alive() and time.monotonic() < deadline:
        time.sleep(0.01)
    assert thread.is_alive(), raised
    start = time.monotonic()
    engine.stop()
    thread.join(10)
    assert time.monotonic() - start < 1.0
    assert isinstance(raised[0], Cancelled)
    assert engine.call("lines.species:normal_name", "fe1") == "Fe I"


def test_a_call_given_up_half_way_never_answers_the_next(engine, invented):
    """A cancelled progress ends the call at its next report, before or without a stop."""
    import window_builders as build

    from linewright.job.options import SolveOptions

    spectrum = build.spectrum_of(build.catalogue_of(60))
    progress = Progress(lambda stage, fraction: fraction > 0.0 and progress.cancel())
    with pytest.raises(Cancelled):
        engine.call("job.solve:solve", spectrum, None, SolveOptions(), progress=progress)
    assert engine.call("lines.species:normal_name", "fe1") == "Fe I"
    assert engine.call("lines.species:normal_name", "ti2") == "Ti II"


def test_a_process_that_dies_is_said_and_replaced(engine):
    engine.call("lines.species:normal_name", "fe1")
    engine._child.kill()
    engine._child.wait()
    assert engine.call("lines.species:normal_name", "fe1") == "Fe I"
    with pytest.raises(EngineLost, match="try again"):
        engine.call("job.view_session:_no_such", progress=_Killer(engine))


class _Killer(Progress):
    """Kills the process while the call is under way."""

    def __init__(self, engine):
        super().__init__()
        self._engine = engine

    def report(self, stage, fraction):
        child = self._engine._alive()
        child.kill()
        self._engine._alive = lambda: child


def test_a_session_travels_whole(invented):
    import pickle

    import window_builders as build

    from linewright.session.encode import session_bytes
    from linewright.window.parcels import packed, unpacked

    session = build.session_of(build.spectrum_of(invented), invented)
    parcel = packed(("done", [1, session], {"a": 2}))
    assert max(len(p) for p in parcel[1:]) < len(pickle.dumps(session.claims)) / 3
    kind, (one, again), rest = unpacked(pickle.loads(pickle.dumps(parcel)))
    assert (kind, one, rest) == ("done", 1, {"a": 2})
    assert again.claims == session.claims
    assert session_bytes(again, build.__file__) == session_bytes(session, build.__file__)

"""What an experiment gives when it tells nothing."""

from gainbench.evidence.outcome import Outcome


def test_an_outcome_is_empty_until_something_is_told():
    outcome = Outcome()
    assert (outcome.fitted, outcome.linear, outcome.fit_percent, outcome.remarks) == ((), (), None, ())

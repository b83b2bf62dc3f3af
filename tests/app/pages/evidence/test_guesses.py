import pytest

from gainbench.evidence import survey_log
from gainbench.model import Experiment, SignalName
from gainbench_app.pages.evidence.guesses import EXPERIMENTS, SIGNALS, guessed_experiment, why_guessed
from gainbench_resources import recipe

T, U, C, W, R = (
    SignalName.TIME,
    SignalName.VOLTAGE,
    SignalName.CURRENT,
    SignalName.SPEED,
    SignalName.SPEED_REFERENCE,
)


@pytest.mark.parametrize(
    ("signals", "experiment"),
    [
        ((T, U, C, W), Experiment.DRIVEN),
        ((T, C, W, R), Experiment.STEP_CHECK),
        ((T, W), Experiment.COAST_DOWN),
        ((T, U, C), Experiment.LOCKED_ROTOR),
        ((T, C, SignalName.CURRENT_REFERENCE), Experiment.FREQUENCY_RESPONSE),
        ((), Experiment.DRIVEN),
    ],
)
def test_an_experiment_is_guessed_from_what_was_logged(signals, experiment):
    assert guessed_experiment(signals) is experiment


def test_all_have_words_and_every_experiment_a_recipe():
    assert set(EXPERIMENTS) == set(Experiment)
    assert set(SIGNALS) == set(SignalName)
    assert all(recipe(one.value).is_file() for one in Experiment)


def test_it_says_what_a_guess_rests_on(tmp_path):
    path = tmp_path / "run.csv"
    rows = "\n".join(f"{k / 100},{k},1,{k * k},red" for k in range(20))
    path.write_text(f"t [s],x [A],speed,zz,mode\n{rows}\n", encoding="utf-8")
    said = [why_guessed(one) for one in survey_log(path).columns]
    assert said[0] == "guessed: time in s, from its name and its unit"
    assert said[1] == "guessed: current in A, from its unit"
    assert said[2] == "perhaps speed, from its name; the file gives no unit"
    assert said[3].startswith("nothing guessed")
    assert said[4] == "holds no numbers"

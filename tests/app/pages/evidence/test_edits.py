import pytest

from gainbench.errors import SheetError
from gainbench.model import EvidenceLog, Experiment, LogColumn, SignalName
from gainbench.sheetfile import parse_sheet
from gainbench_app.pages.evidence import edits

TIME = LogColumn(signal=SignalName.TIME, column="t", unit="s")
CURRENT = LogColumn(signal=SignalName.CURRENT, column="i", unit="A", scale=2.5)
SPEED = LogColumn(signal=SignalName.SPEED, column="n", unit="rpm")


@pytest.fixture
def document(demo_texts):
    parsed = parse_sheet(demo_texts["label-unwinder"], "x.bench.toml")
    for name in ("a.csv", "b.csv"):
        parsed = edits.with_log(parsed, EvidenceLog(log=name, experiment=Experiment.DRIVEN, columns=(TIME, CURRENT)))
    return parsed


def test_a_mapping_changes_where_it_stands(document):
    changed = edits.with_columns(document, 0, [TIME, SPEED])
    assert changed.sheet.evidence[0].columns == (TIME, SPEED)
    assert changed.sheet.evidence[1] == document.sheet.evidence[1]
    plain = LogColumn(signal=SignalName.CURRENT, column="i", unit="mA")
    again = edits.with_columns(document, 1, [TIME, plain])
    assert again.sheet.evidence[1].columns == (TIME, plain)
    assert "scale" not in again.text().rpartition("b.csv")[2]


def test_all_columns_can_be_others_at_once(document):
    assert edits.with_columns(document, 0, [SPEED]).sheet.evidence[0].columns == (SPEED,)


def test_an_experiment_changes_alone(document):
    changed = edits.with_experiment(document, 1, Experiment.COAST_DOWN)
    assert [one.experiment for one in changed.sheet.evidence] == [Experiment.DRIVEN, Experiment.COAST_DOWN]
    assert changed.sheet.evidence[1].columns == (TIME, CURRENT)


def test_a_wrong_unit_is_refused(document):
    wrong = LogColumn(signal=SignalName.SPEED, column="n", unit="kg")
    with pytest.raises(SheetError, match="mass"):
        edits.with_columns(document, 0, [TIME, wrong])


def test_a_signal_is_held_by_one_column_and_a_column_holds_one_signal():
    columns = [TIME, CURRENT, SPEED]
    moved = LogColumn(signal=SignalName.CURRENT, column="n", unit="A")
    assert edits.mapped(columns, moved, names=("n", "speed")) == [TIME, moved]
    assert edits.unmapped(columns, names=("i",)) == [TIME, SPEED]

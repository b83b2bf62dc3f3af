"""Signals and experiments are the words of the sheet's format, and every signal has a dimension."""

from __future__ import annotations

import pytest

from gainbench.model import SIGNAL_DIMENSIONS, EvidenceLog, Experiment, LogColumn, SignalName
from gainbench.sheetfile import parse_sheet
from gainbench.units import Dimension


def test_every_signal_has_a_dimension_and_a_table_of_the_sheet(demo_texts):
    assert list(SIGNAL_DIMENSIONS) == list(SignalName)
    columns = "\n".join(
        f'{signal} = {{ column = "c", unit = "{dimension.unit}" }}' for signal, dimension in SIGNAL_DIMENSIONS.items()
    )
    text = f'{demo_texts["label-unwinder"]}\n[[evidence]]\nlog = "a.csv"\nexperiment = "driven"\n[evidence.columns]\n'
    (log,) = parse_sheet(text + columns, "x").sheet.evidence
    assert [one.signal for one in log.columns] == list(SignalName)


@pytest.mark.parametrize("experiment", list(Experiment))
def test_every_experiment_is_a_word_of_the_sheet(demo_texts, experiment):
    table = f'[[evidence]]\nlog = "a.csv"\nexperiment = "{experiment}"\n[evidence.columns]\n'
    text = f'{demo_texts["label-unwinder"]}\n{table}time = {{ column = "t", unit = "s" }}\n'
    assert parse_sheet(text, "x").sheet.evidence[0].experiment is experiment


def test_references_are_what_their_signals_are():
    assert SIGNAL_DIMENSIONS[SignalName.SPEED_REFERENCE] is Dimension.SPEED
    assert SIGNAL_DIMENSIONS[SignalName.CURRENT_REFERENCE] is Dimension.CURRENT


def test_a_column_is_in_its_unit_unless_scaled():
    column = LogColumn(signal=SignalName.TIME, column="t", unit="s")
    assert column.scale == 1.0
    assert EvidenceLog(log="a.csv", experiment=Experiment.DRIVEN, columns=(column,)).note == ""

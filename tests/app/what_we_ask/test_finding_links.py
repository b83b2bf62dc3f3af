import pytest

from gainbench.assess import assess
from gainbench.results import Finding, Level
from gainbench.sheetfile import parse_sheet
from gainbench_app.on_bench import entries
from gainbench_app.what_we_ask.finding_links import what_to_move
from gainbench_app.what_we_ask.firmware_card import ENTRIES


@pytest.fixture
def sheets(demo_texts):
    """By name; ``by-hand`` and ``pole-placement`` are the first demo by these methods."""
    found = {name: parse_sheet(text, f"{name}.bench.toml") for name, text in demo_texts.items()}
    first = found["label-unwinder"]
    found["by-hand"] = first.with_values(
        {"aims.speed.method": "by-hand", "aims.speed.kp": "0.5 A*s/rad", "aims.speed.ti": "10 ms"}
    )
    found["pole-placement"] = first.with_values(
        {
            "aims.speed.method": "pole-placement",
            "aims.speed.natural_frequency": "30 Hz",
            "aims.speed.damping": "1",
        }
    )
    return {name: document.sheet for name, document in found.items()}


def finding(subject, advice="", reason=""):
    return Finding(code="some", level=Level.THIN, subject=subject, title="some", reason=reason, advice=advice)


@pytest.mark.parametrize(
    ("subject", "advice", "name", "path"),
    [
        ("stage", "A speed_window of 2 halves it; a speed_filter does as well", "label-unwinder", "stage.speed_window"),
        ("duty", "A reference_ramp of 96000 rpm/s or less", "label-unwinder", "duty.reference_ramp"),
        ("speed", "Ask for more margin or a lower crossover", "label-unwinder", "aims.speed.phase_margin"),
        ("current", "Ask for a lower crossover", "label-unwinder", "aims.current.crossover"),
        ("current", "Ask for a lower crossover", "by-hand", "aims.current.crossover"),
        ("speed", "Ask for a lower crossover", "by-hand", "aims.speed.kp"),
        ("speed", "Lower Ki", "by-hand", "aims.speed.ti"),
        ("speed", "Lower Ki", "label-unwinder", "aims.speed.phase_margin"),
        ("speed", "Lower the gains", "pole-placement", "aims.speed.natural_frequency"),
        ("speed", "Ask for more margin", "pole-placement", "aims.speed.method"),
        ("speed", "or for a faster current loop", "label-unwinder", "aims.current.crossover"),
        ("speed", "Lower reference_weight, which touches no margin", "label-unwinder", "aims.speed.reference_weight"),
        ("train", "Ask for more, or stiffen the shaft", "sieve-drum", "train.shaft_stiffness"),
        ("train", "Ask for more, or stiffen the shaft", "label-unwinder", "train"),
        ("machine", "", "label-unwinder", "machine"),
        ("current", "", "label-unwinder", "aims.current.method"),
    ],
)
def test_the_first_thing_that_is_named_is_meant(sheets, subject, advice, name, path):
    assert what_to_move(finding(subject, advice), sheets[name]) == path


def test_without_advice_the_reason_tells(sheets):
    sheet = sheets["label-unwinder"]
    assert what_to_move(finding("stage", reason="the update_delay is long"), sheet) == "stage.update_delay"
    assert what_to_move(finding("stage", "Raise current_rate", "the update_delay is"), sheet) == "stage.current_rate"


@pytest.mark.parametrize(
    "values",
    [
        {},
        {"aims.speed.crossover": "900 Hz"},
        {"aims.current.phase_margin": "20 deg", "aims.speed.phase_margin": "20 deg"},
        {"duty.reference_speed": "9000 rpm"},
        {"train.load_torque": "90 N*m"},
        {"machine.back_emf_constant": "80 mV*s/rad"},
        {"aims.current.crossover": "100 Hz"},
        {"stage.speed_rate": "200 Hz"},
    ],
)
def test_every_finding_leads_to_an_entry_that_there_is(demo_texts, values):
    for name, text in demo_texts.items():
        document = parse_sheet(text, f"{name}.bench.toml").with_values(values if name == "label-unwinder" else {})
        sheet = document.sheet
        there = {
            one.path
            for group in (
                entries.machine_entries(sheet.rig.machine.kind.value),
                entries.train_entries(sheet.rig.train.kind.value),
                entries.stage_entries(sheet.rig.stage.speed_sensor.value),
                entries.duty_entries(),
                ENTRIES,
            )
            for one in group
        }
        for one in assess(sheet).findings:
            path = what_to_move(one, sheet)
            if path.startswith(("aims.current.", "aims.speed.")):
                assert path.rpartition(".")[2] in {"crossover", "phase_margin", "reference_weight", "method"}
            else:
                assert path in there | {"machine", "train", "stage", "duty"}

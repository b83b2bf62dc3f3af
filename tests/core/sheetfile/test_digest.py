"""A digest is of what a sheet says, not of how it is written."""

from __future__ import annotations

import re

import pytest

from gainbench.results import Gains
from gainbench.sheetfile import add_kept, assessed_digest, digest, parse_sheet
from gainbench.sheetfile.tables import ENTRIES

SAME = [
    ("machine.inductance", '"450 uH"'),
    ("machine.inductance", '"0.450 mH"'),
    ("machine.rotor_inertia", '"0.31 kg*cm^2"'),
    ("machine.winding_temperature", '"77 degF"'),
    ("machine.winding_temperature", '"298.15 K"'),
    ("machine.winding_temperature", None),
    ("train.ratio", "3"),
    ("train.efficiency", None),
    ("train.efficiency", "1.0"),
    ("stage.current_rate", '"20000 turn/s"'),
    ("stage.voltage_use", "0.95"),
    ("stage.update_delay", None),
    ("aims.firmware.integrator", None),
    ("aims.speed.crossover", '"3600 rpm"'),
    ("aims.speed.reference_weight", '"100 %"'),
    ("duty.reference_ramp", None),
    ("duty.reference_speed", '"25 Hz"'),
    ("title", '"Another"'),
]


@pytest.mark.parametrize(("path", "toml"), SAME)
def test_another_way_to_write_the_same(demo, altered, path, toml):
    assert digest(altered(demo, path, toml)) == digest(demo)
    assert assessed_digest(altered(demo, path, toml)) == assessed_digest(demo)


def test_comments_blanks_and_order_do_not_matter(demo):
    bare = re.sub(r" *#.*", "", demo)
    head, *tables = bare.split("\n[")
    turned = "\n\n[".join([head, *(tables[index] for index in (6, 2, 1, 0, 3, 5, 4, 7, 8))])
    assert digest(bare) == digest(turned) == digest(demo)


def test_a_load_at_half_of_the_length_is_the_default(demo, altered):
    assert digest(altered(demo, "duty.load_at", '"225 ms"')) == digest(altered(demo, "duty.load_at"))
    assert digest(altered(demo, "duty.load_at", '"226 ms"')) != digest(altered(demo, "duty.load_at"))


def test_every_value_matters(demo, altered):
    digests = {digest(demo)}
    fields = [path for path in ENTRIES if not path.endswith((".kp", ".ki", ".ti", ".wi"))]
    other = {"machine.kind": None, "train.kind": None, "stage.pwm_frequency": '"40 kHz"', "duty.length": '"400 ms"'}
    expected = 1
    for path in fields:
        example = other.get(path, ENTRIES[path].example)
        document = parse_sheet(demo, "x")
        if example is None or document.typed(path) == example.strip('"'):
            continue
        changed = parse_sheet(altered(demo, path, example), "x")
        if changed.sheet == document.sheet:
            continue
        digests.add(digest(changed))
        expected += 1
    assert len(digests) == expected
    assert expected > 35


def test_gains_by_hand_and_the_last_digit_matter(demo, altered):
    by_hand = altered(altered(demo, "aims.current.kp", "1"), "aims.current.ki", "1")
    texts = [
        demo,
        by_hand,
        altered(by_hand, "aims.current.ki", "1.0000000000000002"),
        altered(by_hand, "aims.firmware.ki_includes_period", "true"),
        altered(altered(by_hand, "aims.current.ki"), "aims.current.ti", '"1 s"'),
        altered(altered(by_hand, "aims.current.ki"), "aims.current.wi", '"1 rad/s"'),
    ]
    assert len({digest(text) for text in texts}) == len(texts)


def test_shelf_and_tolerance_enter_one_digest_only(demo, altered):
    kept = add_kept(parse_sheet(demo, "x"), "n", current=Gains(kp=1.0, ki=1.0), speed=Gains(kp=1.0, ki=1.0))
    wider = parse_sheet(altered(demo, 'tolerance."machine.resistance"', '"11 %"'), "x")
    assert len({digest(demo), digest(kept), digest(wider)}) == 3
    assert assessed_digest(demo) == assessed_digest(kept) == assessed_digest(wider)
    assert assessed_digest(demo) != assessed_digest(altered(demo, "duty.length", '"400 ms"'))


def test_evidence_enters_no_digest(demo):
    log = '[[evidence]]\nlog = "a.csv"\nexperiment = "driven"\n[evidence.columns]\n'
    text = f'{demo}\n{log}time = {{ column = "t", unit = "s" }}\n'
    assert parse_sheet(text, "x").sheet.evidence
    assert digest(text) == digest(demo)
    assert assessed_digest(text) == assessed_digest(demo)


def test_text_document_and_sheet_have_one_digest(demo):
    document = parse_sheet(demo, "x")
    assert digest(demo) == digest(document) == digest(document.sheet)
    assert re.fullmatch("[0-9a-f]{64}", digest(demo))


def test_the_digest_is_the_same_in_every_version(demo):
    # Handed over files carry it: it must not change with a later version of this program.
    assert assessed_digest(demo)[:16] == "dbb8f44e1c446c19"

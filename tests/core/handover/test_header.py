"""The header as a compiler, a checker and a reader see it.

Outside oracles: gcc as a C99 compiler with its warnings as errors, and cppcheck with its MISRA C:2012 add-on. The rules
3.1, 5.4 and 21.1 were read in a third party's checker documents; rule 2.5 (unused macro, advisory) cannot hold for a
header of constants.
"""

from __future__ import annotations

import re
import shutil
import subprocess
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import example, given
from hypothesis import strategies as st

from gainbench.errors import HandoverError
from gainbench.handover import CAUTIONS, Source, bench_procedure, write_header
from gainbench.handover.comments import code_lines
from gainbench.handover.header import refusal

DEMOS = ["label-unwinder", "bottle-indexer", "sieve-drum"]
STRICT = ["-std=c99", "-pedantic", "-Wall", "-Wextra", "-Wconversion", "-Werror"]
hostile = st.text(alphabet=st.sampled_from("*/?\\# \"'\n\rab0;{}Ä漢\u2028\u202e"), min_size=1, max_size=60) | st.text(
    min_size=1, max_size=200
)


def header_of(demos, sources, name, **keys):
    return write_header(demos[name], sources[name], **keys)


def said(header):
    """The head of a file as running text."""
    head = header.text.split("*/", 1)[0]
    return " ".join(line.removeprefix(" *").strip() for line in head.splitlines()[1:])


@pytest.mark.parametrize("name", DEMOS)
def test_head_says_all_that_must_be_known(demos, sources, name):
    assessment, head = demos[name], said(header_of(demos, sources, name))
    assert sources[name].digest in head
    assert f"{name}.bench.toml" in head
    assert assessment.sheet.title in head
    assert "Tuning: designed by the aims of the sheet" in head
    assert f"{assessment.speed.figures.phase_margin_deg:.2f} deg" in head
    assert "dead time and PWM ripple" in head
    assert "positive direction is the one in which the encoder counts up" in head
    assert "only where the firmware divides its voltage command by the measured bus voltage" in head
    assert "ISO 12100" in head
    for text in (*CAUTIONS, *bench_procedure(assessment)):
        assert text in head


@pytest.mark.parametrize("name", DEMOS)
def test_findings_that_are_not_fine_are_in_the_head(demos, sources, name):
    head = said(header_of(demos, sources, name))
    for finding in demos[name].findings:
        assert (finding.text in head) == (finding.level.value != "holds")


def test_kept_tuning_is_named(demos, sources):
    source = replace(sources["label-unwinder"], tuning="first light */ int x;")
    assert "Tuning: kept, first light [U+002A][U+002F] int x;" in said(write_header(demos["label-unwinder"], source))


def test_same_assessment_same_text(demos, sources):
    assert header_of(demos, sources, "sieve-drum") == header_of(demos, sources, "sieve-drum")


def test_prefix_is_before_every_macro_and_in_the_guard(demos, sources):
    header = header_of(demos, sources, "label-unwinder", prefix="AXIS1")
    assert header.name == "label_unwinder_gains.h"
    assert set(re.findall(r"^#(?:define|ifndef) (\w+?)_(?=[A-Z])", header.text, re.MULTILINE)) == {"AXIS1"}
    assert "#ifndef AXIS1_GAINS_H\n#define AXIS1_GAINS_H\n" in header.text


@given(title=hostile, tuning=hostile, sheet=hostile)
@example(title="*/ int evil(void); /*", tuning="??/", sheet="a\\")
@example(title="x*/\n#define LABEL_CURRENT_KP 1e9F\n/*", tuning="a", sheet="b")
@example(title="http://example.org/*", tuning="//", sheet="/*")
def test_no_text_of_the_user_adds_or_hides_code(demos, sources, title, tuning, sheet):
    assessment = demos["label-unwinder"]
    plain = write_header(assessment, sources["label-unwinder"], prefix="AXIS1")
    named = replace(assessment, sheet=replace(assessment.sheet, title=title))
    source = Source(sheet_name=sheet, digest=sources["label-unwinder"].digest, tuning=tuning)
    header = write_header(named, source, prefix="AXIS1")
    assert code_lines(header.text) == code_lines(plain.text)
    assert header.text.isascii()
    assert "??" not in header.text
    assert not re.search(r"\\", header.text)
    for comment in re.findall(r"/\*(.*?)\*/", header.text, re.DOTALL):
        assert "/*" not in comment
        assert "//" not in comment


@given(title=hostile)
def test_every_title_gives_macros_that_can_be_told_apart(demos, sources, title):
    assessment = demos["bottle-indexer"]
    named = replace(assessment, sheet=replace(assessment.sheet, title=title))
    names = re.findall(r"#define (\w+)", write_header(named, sources["bottle-indexer"]).text)
    assert len({name[:31] for name in names}) == len(names)
    assert not [name for name in names if name.startswith("_")]


@pytest.fixture(scope="module")
def gcc():
    found = shutil.which("gcc")
    if found is None:
        pytest.skip("gcc is not installed: apt install gcc")
    return found


def program(header):
    """A program that prints every macro exactly, and that floats are floats and counts unsigned."""
    lines = [f'#include "{header.name}"', f'#include "{header.name}"', "#include <stdio.h>", "int main(void) {"]
    for name, literal in header.values.items():
        macro = f"{header.prefix}_{name}"
        if literal.endswith("F"):
            lines.append(f'  printf("{name} %d %a\\n", (int)(sizeof({macro}) == sizeof(float)), (double){macro});')
        else:
            lines.append(f'  printf("{name} %d %llu\\n", 0U * {macro} - 1U > 0U, (unsigned long long){macro});')
    return "\n".join([*lines, "  return 0;", "}", ""])


@pytest.mark.parametrize("name", DEMOS)
def test_compiles_clean_and_gives_the_assessed_numbers(demos, sources, gcc, tmp_path, name):
    assessment, header = demos[name], header_of(demos, sources, name)
    (tmp_path / header.name).write_text(header.text, encoding="ascii")
    (tmp_path / "main.c").write_text(program(header), encoding="ascii")
    built = subprocess.run([gcc, *STRICT, "main.c", "-o", "main"], cwd=tmp_path, capture_output=True, text=True)
    assert (built.returncode, built.stderr) == (0, "")
    printed = subprocess.run([tmp_path / "main"], check=True, capture_output=True, text=True).stdout.splitlines()
    found = {words[0]: words[1:] for words in (line.split() for line in printed)}
    assert found.keys() == header.values.keys()
    assert all(typed == "1" for typed, _ in found.values())
    stage = assessment.sheet.rig.stage
    expected = {
        "CURRENT_KP": assessment.current.gains.kp,
        "CURRENT_KI_TS": assessment.current.gains.ki * stage.current_period,
        "SPEED_KP": assessment.speed.gains.kp,
        "SPEED_KI_TS": assessment.speed.gains.ki * stage.speed_period,
        "CURRENT_LIMIT_A": assessment.plant.current_limit,
        "VOLTAGE_LIMIT_V": assessment.plant.voltage_limit,
        "CURRENT_RATE_HZ": stage.current_rate,
        "SPEED_RATE_HZ": stage.speed_rate,
    }
    for symbol, value in expected.items():
        assert float.fromhex(found[symbol][1]) == float(np.float32(value)), symbol
    assert int(found["ENCODER_COUNTS"][1]) == stage.encoder_counts


def test_a_hostile_title_compiles_clean_too(demos, sources, gcc, tmp_path):
    assessment = demos["label-unwinder"]
    title = '*/ int evil(void); ??/ /* // \\ "巻" http://x'
    header = write_header(replace(assessment, sheet=replace(assessment.sheet, title=title)), sources["label-unwinder"])
    (tmp_path / header.name).write_text(header.text, encoding="ascii")
    (tmp_path / "main.c").write_text(program(header), encoding="ascii")
    built = subprocess.run([gcc, *STRICT, "main.c", "-o", "main"], cwd=tmp_path, capture_output=True, text=True)
    assert (built.returncode, built.stderr) == (0, "")


@pytest.mark.parametrize("name", DEMOS)
def test_misra_checker_finds_nothing(demos, sources, tmp_path, name):
    checker = shutil.which("cppcheck")
    if checker is None:
        pytest.skip("cppcheck is not installed: apt install cppcheck")
    header = header_of(demos, sources, name)
    command = [checker, "--std=c99", "--addon=misra", "--enable=style", "--error-exitcode=3", "--quiet"]
    command += ["--suppress=misra-c2012-2.5", "--suppress=unusedFunction", "unit.c"]
    use = f"\nfloat gain(void);\nfloat gain(void)\n{{\n    return {header.prefix}_CURRENT_KP;\n}}\n"

    def checked(text):
        # The checker looks at the comments of the file it is given, not at those of what that includes.
        (tmp_path / "unit.c").write_text(text + use, encoding="ascii")
        done = subprocess.run(command, cwd=tmp_path, capture_output=True, text=True)
        if "Did not find addon" in done.stderr + done.stdout:
            pytest.skip("cppcheck has no MISRA add-on here")
        return done

    done = checked(header.text)
    assert (done.returncode, done.stderr) == (0, "")
    spoilt = checked(header.text.replace("ORIGIN", "ORIGIN /* //", 1).replace("1U\n", "1\n#define _B 1U\n", 1)).stderr
    assert "misra-c2012-3.1" in spoilt
    assert "misra-c2012-21.1" in spoilt


def test_refused_targets_export_nothing(unwinder, sources):
    refused = unwinder({"aims.speed.crossover": "900 Hz"})
    finding = next(one for one in refused.findings if one.level.value == "breaks")
    assert refusal(refused) == f"nothing is exported: t{finding.title[1:]}"
    with pytest.raises(HandoverError, match=r"^label-unwinder\.bench\.toml: nothing is exported: ") as caught:
        write_header(refused, sources["label-unwinder"])
    # What is nearest to the targets.
    assert finding.advice in str(caught.value)


def test_an_unstable_loop_exports_nothing(unwinder, sources):
    by_hand = {"method": "by-hand", "kp": "30 V/A", "ki": "4681 V/(A*s)"}
    unstable = unwinder({f"aims.current.{key}": value for key, value in by_hand.items()})
    assert refusal(unstable) == "nothing is exported: the current loop is unstable"
    with pytest.raises(HandoverError, match="the current loop is unstable"):
        write_header(unstable, sources["label-unwinder"])


def test_without_a_finding_the_loop_is_named(demos):
    assessment = demos["label-unwinder"]
    shaky = replace(assessment.speed, figures=replace(assessment.speed.figures, stable=False))
    assert refusal(replace(assessment, speed=shaky)) == "nothing is exported: the speed loop has no stable gains"
    assert refusal(assessment) == ""


def test_other_breaks_do_not_keep_a_header_back(unwinder, sources):
    assessment = unwinder({"train.load_torque": "90 N*m"})
    assert assessment.response is None
    header = write_header(assessment, sources["label-unwinder"])
    assert "no response was computed" in header.text
    assert "breaks: The drive cannot hold its load" in said(header)

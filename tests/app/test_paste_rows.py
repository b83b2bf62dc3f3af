import pytest

from gainbench_app.paste_rows import recognised


@pytest.mark.parametrize(
    ("row", "path", "value"),
    [
        ("Terminal resistance\t0.207\t\u03a9", "machine.resistance", "0.207 ohm"),
        ("0.169 mH  terminal inductance", "machine.inductance", "0.169 mH"),
        ("Torque constant | mNm/A | 52.5", "machine.torque_constant", "52.5 mNm/A"),
        ("Speed constant; 182; rpm/V", "machine.speed_constant", "182 rpm/V"),
        ("Back EMF constant 5.4 V/krpm", "machine.back_emf_constant", "5.4 V/krpm"),
        ("Rotor inertia 181 gcm\u00b2", "machine.rotor_inertia", "181 g*cm^2"),
        ("Moment of inertia 0.31 kg cm2", "machine.rotor_inertia", "0.31 kg*cm^2"),
        ("Nominal voltage V 48", "machine.rated_voltage", "48 V"),
        ("Max. continuous current A 6,5", "machine.rated_current", "6.5 A"),
        ("Peak current 1.234,5 A", "machine.peak_current", "1234.5 A"),
        ("Max. permissible speed rpm 12\u2019000", "machine.max_speed", "12000 rpm"),
        ("Number of pole pairs 7", "machine.pole_pairs", "7"),
        ("Viscous friction 20 uN*m*s/rad", "machine.viscous_friction", "20 uN*m*s/rad"),
        ("Counts per turn 4096", "stage.encoder_counts", "4096"),
        ("Load inertia 3.6e-4 kgm2", "train.load_inertia", "3.6e-4 kg*m^2"),
        ("R = 0.6 ohm", "machine.resistance", "0.6 ohm"),
    ],
)
def test_a_row_is_recognised_in_any_order(row, path, value):
    (found,) = recognised(row)
    assert (found.path, found.value, found.reason) == (path, value, "")
    assert found.usable


@pytest.mark.parametrize(
    ("row", "why"),
    [
        ("No load current 137 mA", "not recognised"),
        ("Stall current 80 A", "not recognised"),
        ("Thermal resistance 3.2 K/W", "not recognised"),
        ("Mechanical time constant 4.2 ms", "not recognised"),
        ("Weight 480 g", "not recognised"),
        ("Resistance 0.5 V", "no unit of this entry"),
        ("Resistance 0.5", "no unit was found"),
        ("Resistance ohm", "no number was found"),
        ("Resistance 0.5 0.6 ohm", "several numbers: 0.5, 0.6"),
        ("Peak current 1,250 A", "cannot be told"),
        ("Resistance 0 ohm", "above 0"),
    ],
)
def test_what_is_not_certain_is_not_guessed(row, why):
    (found,) = recognised(row)
    assert not found.usable
    assert why in found.reason


def test_of_two_rows_for_one_entry_the_first_counts():
    first, second = recognised("Resistance 0.5 ohm\n\nTerminal resistance 0.6 ohm")
    assert first.usable
    assert second.reason == "a row above sets the same entry"


@pytest.mark.parametrize(
    ("row", "said", "other"),
    [
        ("Resistance phase to phase 0.5 ohm", {"winding_values": "phase"}, {"winding_values": "line-to-line"}),
        ("Resistance per phase 0.5 ohm", {"winding_values": "line-to-line"}, {"winding_values": "phase"}),
        ("Peak current 20 Arms", {"current_values": "peak"}, {"current_values": "rms"}),
        ("Torque constant 0.5 Nm/Arms", {"current_values": "peak"}, {"current_values": "rms"}),
    ],
)
def test_a_row_of_another_convention_is_refused(row, said, other):
    (found,) = recognised(row, **said)
    assert found.reason.startswith("the row says")
    assert recognised(row, **other)[0].usable
    assert recognised(row)[0].usable


def test_empty_text_has_no_rows():
    assert recognised(" \n\t\n") == ()

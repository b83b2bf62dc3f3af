"""Which entries each card shows, in the words of people, in the order of the sheet."""

from __future__ import annotations

from gainbench.sheetfile import quantity_paths
from gainbench_app.on_bench.meanings import MEANINGS
from gainbench_app.widgets.entry_row import Entry

MACHINE_KINDS = (("brushed-dc", "brushed DC"), ("pm-sine", "PM, field-oriented"), ("pm-block", "PM, six-step"))
TRAIN_KINDS = (("rigid", "rigid"), ("elastic", "elastic"))
_WINDING = (("line-to-line", "line to line"), ("phase", "phase"))
_AMPERES = (("rms", "rms"), ("peak", "peak"))
_VOLTS = (
    ("line-to-line-rms", "line rms"),
    ("line-to-line-peak", "line peak"),
    ("phase-rms", "phase rms"),
    ("phase-peak", "phase peak"),
)
_SENSORS = (("encoder", "encoder"), ("ideal", "ideal"))
SWITCH = (("false", "no"), ("true", "yes"))


def _entry(
    path: str, name: str, *, words: tuple[tuple[str, str], ...] = (), default: str = "", optional: bool = True
) -> Entry:
    # Of the duty nothing varies from drive to drive: it is what is asked of all of them.
    spread = path in quantity_paths() and not path.startswith("duty.")
    return Entry(
        path=path, name=name, words=words, default=default, optional=optional, meaning=MEANINGS[path], spread=spread
    )


def _required(path: str, name: str, words: tuple[tuple[str, str], ...] = ()) -> Entry:
    return _entry(path, name, words=words, optional=False)


def _with_default(path: str, name: str, default: str, words: tuple[tuple[str, str], ...] = ()) -> Entry:
    return _entry(path, name, words=words, default=default)


def _optional(path: str, name: str) -> Entry:
    return _entry(path, name, default="not given")


def machine_entries(kind: str) -> tuple[Entry, ...]:
    """Entries of a machine of a kind."""
    sine, block = kind == "pm-sine", kind == "pm-block"
    found = [
        _required("machine.resistance", "resistance"),
        _required("machine.inductance", "inductance"),
    ]
    if sine or block:
        found += [
            _required("machine.winding_values", "measured", _WINDING),
            _required("machine.pole_pairs", "pole pairs"),
        ]
    if sine:
        found.append(_required("machine.current_values", "amperes are", _AMPERES))
    found += [
        _optional("machine.torque_constant", "torque constant"),
        _optional("machine.back_emf_constant", "back-EMF constant"),
    ]
    if sine:
        found.append(_entry("machine.back_emf_values", "its volts are", words=_VOLTS))
    else:
        found.append(_optional("machine.speed_constant", "speed constant"))
    return (
        *found,
        _required("machine.rotor_inertia", "rotor inertia"),
        _with_default("machine.viscous_friction", "viscous friction", "0"),
        _with_default("machine.coulomb_friction", "Coulomb friction", "0"),
        _with_default("machine.winding_temperature", "winding at", "25 degC"),
        _optional("machine.rated_voltage", "rated voltage"),
        _optional("machine.rated_current", "rated current"),
        _optional("machine.peak_current", "peak current"),
        _optional("machine.max_speed", "highest speed"),
    )


def train_entries(kind: str) -> tuple[Entry, ...]:
    """Entries of a train of a kind."""
    elastic = (
        (
            _required("train.shaft_stiffness", "shaft stiffness"),
            _required("train.shaft_damping", "shaft damping"),
        )
        if kind == "elastic"
        else ()
    )
    return (
        _with_default("train.ratio", "turns per load turn", "1"),
        _required("train.load_inertia", "load inertia"),
        *elastic,
        _with_default("train.efficiency", "efficiency", "100 %"),
        _with_default("train.coupling_inertia", "coupling inertia", "0"),
        _with_default("train.load_viscous_friction", "load viscous", "0"),
        _with_default("train.load_coulomb_friction", "load Coulomb", "0"),
        _with_default("train.load_torque", "load torque", "0"),
    )


def stage_entries(sensor: str) -> tuple[Entry, ...]:
    """Entries of a stage with a sensor."""
    encoder = (
        (
            _required("stage.encoder_counts", "encoder counts"),
            _with_default("stage.speed_window", "speed window", "1 period"),
        )
        if sensor == "encoder"
        else ()
    )
    return (
        _required("stage.bus_voltage", "bus voltage"),
        _with_default("stage.voltage_use", "used of it", "95 %"),
        _required("stage.current_limit", "current limit"),
        _required("stage.pwm_frequency", "PWM frequency"),
        _required("stage.current_rate", "current rate"),
        _with_default("stage.update_delay", "update delay", "1 period"),
        _with_default("stage.current_filter", "current filter", "0"),
        _required("stage.speed_rate", "speed rate"),
        _with_default("stage.speed_delay", "speed delay", "0 periods"),
        _required("stage.speed_sensor", "speed sensor", _SENSORS),
        *encoder,
        _with_default("stage.speed_filter", "speed filter", "0"),
    )


def duty_entries() -> tuple[Entry, ...]:
    """Entries of the duty."""
    return (
        _required("duty.reference_speed", "reference"),
        _with_default("duty.reference_at", "given at", "0"),
        _with_default("duty.reference_ramp", "its ramp", "a step"),
        _with_default("duty.load_step", "load step", "0"),
        _with_default("duty.load_at", "load at", "half of length"),
        _entry("duty.stop_at", "stop at", default="never"),
        _with_default("duty.stop_ramp", "stop ramp", "a step"),
        _required("duty.length", "length"),
    )


MAIN_ENTRIES = frozenset(
    [
        "machine.viscous_friction",
        "machine.coulomb_friction",
        "machine.peak_current",
        "train.ratio",
        "duty.load_step",
    ]
)
"""Shown folded away or not, though the sheet may leave them out."""

HIDDEN_AT_DEFAULT: dict[str, tuple[str, ...]] = {
    "machine.winding_temperature": ("25 degC",),
    "train.efficiency": ("100 %", "100%", "1", "1.0"),
    "train.coupling_inertia": ("0 kg*cm^2", "0 kg*m^2", "0 g*cm^2"),
    "train.load_viscous_friction": ("0 N*m*s/rad",),
    "train.load_coulomb_friction": ("0 N*m",),
    "train.load_torque": ("0 N*m",),
    "stage.voltage_use": ("95 %", "95%", "0.95"),
    "stage.current_filter": ("0 s",),
    "stage.speed_delay": ("0",),
    "stage.speed_window": ("1",),
    "stage.speed_filter": ("0 s",),
    "duty.reference_ramp": ("0 rpm/s",),
    "duty.stop_ramp": ("0 rpm/s",),
}
"""Entries that say no more than their default go behind the "more" of a card."""


def entry_name(path: str) -> str:
    """An entry in the words of people, as on its card."""
    every = [*duty_entries()]
    for kind, _ in MACHINE_KINDS:
        every += machine_entries(kind)
    for kind, _ in TRAIN_KINDS:
        every += train_entries(kind)
    for sensor, _ in _SENSORS:
        every += stage_entries(sensor)
    return next((one.name for one in every if one.path == path), path)

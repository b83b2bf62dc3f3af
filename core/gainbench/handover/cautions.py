"""What must be said wherever gains leave the tool: plain ASCII sentences, shown as they stand."""

NOT_MODELLED: tuple[str, ...] = (
    "dead time and PWM ripple",
    "cogging and torque ripple",
    "brush drop",
    "sensor noise and offset",
    "saliency and field weakening",
    "limits of the supply",
)
"""What the figures do not know of."""

SIGN_CONVENTION = (
    "Positive voltage drives positive current, positive current gives torque in the positive direction, and the "
    "positive direction is the one in which the encoder counts up. A positive load torque brakes a positive speed."
)

BUS_CONDITION = (
    "Gains in V/A hold only where the firmware divides its voltage command by the measured bus voltage before it "
    "becomes a duty cycle. Without that division they change with the bus."
)

CAUTIONS: tuple[str, ...] = (
    "First run unloaded or guarded, with the current limit set low and an emergency stop within reach.",
    "Before touching anything: discharge the DC link and measure that it is.",
    "A wrong sign or a wrong unit runs away at full torque. Check encoder direction and current polarity first, and "
    "for permanent-magnet machines the commutation offset: 180 degrees off runs away.",
    "An emergency stop does not stop an inertia. Braking raises the bus voltage. A vertical load falls when the power "
    "goes: use a holding brake.",
    "A permanent-magnet motor makes voltage while it turns, whether powered or not, and jumps when it is aligned.",
    "A locked rotor overheats in seconds.",
    "Let a motor coast down only with open terminals.",
    "The code has no overcurrent trip: the power stage must have its own.",
)
"""The cautions, each a sentence or two."""

ESTIMATE = (
    "These are engineering estimates. Local codes, the risk assessment of the machine (ISO 12100), IEC 60204-1 and "
    "IEC 61800-5-1 and -5-2 or NFPA 79, and licensed practice decide."
)

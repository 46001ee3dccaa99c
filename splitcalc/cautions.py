"""What every output meant for others says: cautions, and what is not covered."""

CAUTIONS = (
    "A design aid, not a certified calculation: have it reviewed by a qualified engineer, where "
    "the law asks by a licensed one. Local codes and machine-safety standards come first. "
    "Strength is not safety conformity: crushing and pinching between tools, thrown wood and oil "
    "injected under the skin hurt people on machines whose beams hold."
)

NOT_COVERED = (
    "towing, hitch, axle, jack and pivot loads",
    "log lift, table, cradle",
    "a beam built into a frame at several places",
    "flywheel or impact machines",
    "the twisting couple of spiral grain",
    "tipping",
    "gland, piston nut, rod thread, end-cap weld (the cylinder maker's)",
    "hoses, valves, rod-side pressure intensification",
    "brittle fracture, unless lowest temperature and steel subgrade are given",
    "corrosion and wear",
    "everything about safe operation (controls, crush zone, guarding)",
)

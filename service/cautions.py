"""What must be said wherever answers of this service are shown: one line each.

Left out: where the lines stand; the start-up text and the pages see to that.
"""

NOT_A_SAFETY_FUNCTION = (
    "Not a safety function and no safety-related part of a control system: never for interlocks, "
    "enabling, zone release or speed and separation monitoring (ISO 10218-1/-2, ISO 13849-1)."
)

CAUTIONS = (
    NOT_A_SAFETY_FUNCTION,
    '"Reachable" means geometry only: no collision, cable, payload or dynamics check.',
    "A displayed pose may be late, stale, simulated or wrong; nothing that is displayed here, and "
    'nothing that is missing, ever means "safe to enter".',
    "Joint values from here are proposals: first run at reduced speed by trained people.",
    "After a collision, motor, gear, tool or base change the table is void until a check pose "
    "has been measured.",
    "Plant network only, least privilege (IEC 62443).",
    "Local codes and licensed practice stand above all of it.",
)

"""Every rule in the order of the output, found by its id."""

from types import ModuleType

from trends.rules import (
    acuity_method_changed,
    alarm_symptoms,
    away,
    break_off,
    crossed_limit,
    crossed_limit_possible,
    did_not_come,
    drift,
    fluid_back,
    late,
    letters_lost,
    limited_early_response,
    looks_like_other_eye,
    no_plan,
    off_chart_step,
    persistent,
    poor_scan,
    pressure,
    pressure_after,
    rise_since_withholding,
    same_day_both_implants,
    same_in_both_eyes,
    same_lot_both_eyes,
    scanner_changed,
    slow_rise,
    thickening,
    thickening_possible,
    tonometer_changed,
    too_soon,
    transposed,
    treatment_context,
    undecided,
    unit_doubt,
    unlikely_jump,
)

VISIT_RULES: tuple[ModuleType, ...] = (
    thickening,
    thickening_possible,
    rise_since_withholding,
    drift,
    crossed_limit,
    crossed_limit_possible,
    fluid_back,
    slow_rise,
    persistent,
    limited_early_response,
    letters_lost,
    off_chart_step,
    pressure,
    pressure_after,
    alarm_symptoms,
    too_soon,
    same_day_both_implants,
    same_lot_both_eyes,
    treatment_context,
    scanner_changed,
    acuity_method_changed,
    tonometer_changed,
    same_in_both_eyes,
    looks_like_other_eye,
    transposed,
    unlikely_jump,
    unit_doubt,
    poor_scan,
)
STANDING_RULES: tuple[ModuleType, ...] = (
    did_not_come,
    late,
    break_off,
    away,
    no_plan,
    undecided,
)


def by_id() -> dict[str, ModuleType]:
    """Return every rule module by its id, in output order."""
    return {rule.INFO.id: rule for rule in (*VISIT_RULES, *STANDING_RULES)}

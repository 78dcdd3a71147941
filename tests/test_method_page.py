"""The values on the guide's page of the method are those the program computes with."""

import math
from pathlib import Path

import pytest

import cladwatt
from cladwatt import Settings, frame_assessment
from cladwatt.inverse import (
    advice,
    around_pipe,
    bare,
    beside_components,
    cautions,
    component_estimates,
    components,
    detectable,
    film_states,
    frame_draws,
    hidden_side,
    joint,
    kind_families,
    kinds,
    line_draws,
    line_log,
    line_profile,
    local_damage,
    null,
    observe,
    opening,
    plan,
    profile,
    rain,
    references,
    steady_state,
    stretch_results,
    stretch_side,
    stretches,
    surroundings_draws,
    survey_joint,
    tracer_place,
    tracing,
    verdict,
    water_draws,
)
from cladwatt.materials.load import shipped_tables
from cladwatt.materials.tables import fitting_equivalent_length, hanger_share
from cladwatt.measure import strip
from cladwatt.physics import convection_spread, spreading, yawed_wind
from cladwatt.physics.constants import ZERO_CELSIUS
from cladwatt.physics.field_methods import MINIMUM_SEPARATION
from cladwatt.report import kind_words
from cladwatt.survey import sun_builder
from cladwatt.survey.surroundings_builder import SKY_BAND_BELOW_AIR

FOLDER = Path(cladwatt.__file__).parent / "guide"
PAGE = " ".join((FOLDER / "method.md").read_text(encoding="utf-8").split())
DEFAULTS = shipped_tables().defaults
FOIL, TAPE = DEFAULTS["foil_emissivity"], DEFAULTS["tape_emissivity"]
DRAUGHT, STILL = DEFAULTS["air_speed_indoors"], DEFAULTS["air_speed_indoors_sheltered"]
FILM, RAIN = DEFAULTS["water_film_total_emissivity"], DEFAULTS["rain_film_thickness"]
SPAN = [water_draws.FILM_SPAN.value + side * 3**0.5 * water_draws.FILM_SPAN.u for side in (-1, 1)]
CONTACT_U = DEFAULTS["u_contact_reading"]


def bare_length(kind: str) -> str:
    amount = fitting_equivalent_length(kind, lagged=False).amount
    return f"bare | {amount.value:g} m of bare pipe, u {amount.u:g} m | "


def clad_length(kind: str) -> str:
    amount = fitting_equivalent_length(kind, lagged=True).amount
    return f"lagged | adds {amount.lower:g} to {amount.upper:g} m of the clad line,"


def bare_on_clad(kind: str) -> str:
    amount = fitting_equivalent_length(kind, lagged=False, counts_as="lagged_pipe").amount
    small, large = components.PRINTED_TEMPERATURES
    degrees = f"{small - ZERO_CELSIUS:g} to {large - ZERO_CELSIUS:g} °C"
    return (
        f"bare, on a lagged line | adds {amount.lower:g} to {amount.upper:g} m of the clad line, "
        f"all equally likely; DN 50 to 100, {degrees}"
    )


def tried_lengths() -> str:
    low, middle, high = beside_components.LENGTH_FACTORS
    return f"at {low}, {middle:g} and {high} times L"


def percent(share: float) -> str:
    return f"{100 * share:.3g} %"


VALUES = [
    f"not searched beside a component | {beside_components.NOT_SEARCHED:g} L |",
    f"no sound level taken from beside a component | {beside_components.NOT_SOUND:g} L | "
    f"{percent(round(math.exp(-beside_components.NOT_SOUND), 2))} of the warmth",
    f"fitted over | {beside_components.FITTED:g} L beyond the first usable station, "
    f"{tried_lengths()}",
    f"scatter of sound lagging, {percent(joint.SOUND_SCATTER)} (section 8), times that",
    f"emissivity of foil | {FOIL.value}, u {FOIL.u} |",
    f"emissivity of tape | {TAPE.value}, u {TAPE.u} |",
    f"u of a contact reading | {CONTACT_U.value} K |",
    f"what the cladding mirrors | {references.FOIL_U} K |",
    f"u of a background by its own emissivity | {references.BACKGROUND_EMISSIVITY_U} K |",
    f"since tape cools where it sticks, coated | {percent(references.TAPE_COOLING)} |",
    f"since tape cools where it sticks, metal | {percent(references.TAPE_COOLING_METAL)} |",
    f"Less than {MINIMUM_SEPARATION:g} K from the reflected temperature",
    f"within {math.degrees(math.asin(strip.WIDEST_FRACTION)):.0f}° is used, and "
    f"{strip.EDGE_MARGIN_PX} px are kept clear",
    f"directions mirrored, metal | {surroundings_draws.MIRRORED_DIRECTIONS_METAL:g} |",
    f"directions mirrored, coat | {surroundings_draws.MIRRORED_DIRECTIONS:g} |",
    f"by pieces, beyond theirs | {surroundings_draws.PIECES_MIRRORED_U:g} K |",
    f"in the band, undeclared | 0 to {SKY_BAND_BELOW_AIR:g} K below the air",
    f"in bins of {line_profile.BIN:g} m counted",
    f"Beyond {line_log.DISAGREE:g} standard uncertainties they do not agree",
    f"a misplacement of one by {line_log.STATION_U:g} m (assumption)",
    f"or lie within {2 * line_log.STATION_U:g} m are one damage",
    f"u of a drawn edge | {strip.OUTLINE_ERROR_PX} px |",
    f"where none is declared | {strip.UNKNOWN_VIEW_DEG:.0f}°,",
    f"{percent(observe.COMPONENT_MARGIN)} of the width, at least 3 px |",
    f"draught of {DRAUGHT.value} m/s, u {DRAUGHT.u}; of {STILL.value} m/s, u {STILL.u},",
    f"within {yawed_wind.LEAST_PUBLISHED_ANGLE:g}° of the axis nothing is published for a wind of "
    f"Re above {yawed_wind.SLOW_REYNOLDS:g}",
    f"taken {frame_draws.SPREAD_AT_RISE:g} K above the air on {frame_draws.SPREAD_AT_DIAMETER:g} m",
    f"no less than {percent(convection_spread.STILL_AIR_FLOOR)} in still air and "
    f"{percent(convection_spread.CROSS_FLOW_FLOOR)} across flow",
    f"a water film's emissivity of {DEFAULTS['water_film_emissivity'].value}",
    f"with one of {FILM.value}, u {FILM.u}, over a span",
    f"total emissivity of the film | {FILM.value}, u {FILM.u} |",
    f"until wet all over | {SPAN[0]:.2g} to {SPAN[1]:.2g} K,",
    f"more than {percent(film_states.NOTICED_SHARE)} of the draws that is told",
    f"more than {-sun_builder.CLEARLY_DOWN_DEG:g}° below the horizon",
    f"holds {percent(sun_builder.HAZE_U)} for haze and altitude",
    f"haze and altitude, clear sky | u {percent(sun_builder.HAZE_U)} |",
    f"no cover is declared | {sun_builder.MEAN_CLOUD_FACTOR:.2f} to 1,",
    f"above {sun_builder.BRIGHTER_THAN_CLEAR:g} times a clear sky's is questioned",
    f"in more than {percent(rain.MAY_BE_WET)} of the draws (what",
    f"any hour of the last {rain.DAY_HOURS:g}",
    f"beyond {percent(rain.MOSTLY_WET)} contrasts",
    f"that rain leaves | {RAIN.value * 1e3:g} mm, u {RAIN.u * 1e3:g} mm, {RAIN.lower * 1e3:g} to"
    f" {RAIN.upper * 1e3:g} mm |",
    f"({percent(rain.UNKNOWN_HUMIDITY)} where unknown) to saturated",
    f"fallen to {percent(steady_state.LACKING)} of what the surface",
    f"for what lingers | {steady_state.STRONGEST_SUN:g} W/m² |",
    f"band and total emissivity | {line_draws.EMISSIVITY_CORRELATION} |",
    f"where no diameter is known | {observe.UNKNOWN_DIAMETER} m,",
    f"({Settings().draws} draws by default)",
    f"by {stretches.CANDIDATE_SIGMA} u are candidates",
    f"steeper than {tracer_place.STEEPEST_DEG:g}° or within "
    f"{math.degrees(math.asin(tracer_place.LEAST_LEVEL)):.0f}° of the plumb line",
    f"{tracing.POOL} tracers that might lie there",
    f"a fluid less than {tracing.LEAST_DRIVE:g} K above the air",
    f"of a cable | {1e3 * tracing.TRACER_RADIUS['steam']:g} mm, "
    f"{1e3 * tracing.TRACER_RADIUS['electric']:g} mm, each with sigma of the "
    f"logarithm {tracing.TRACER_RADIUS_SPREAD} |",
    f"to the tracer's temperature | {tracing.LEAST_COVERED} to {tracing.MOST_COVERED},",
    f"loose to cemented | {tracing.CONTACT} W/(m K), sigma of the logarithm "
    f"{tracing.CONTACT_SPREAD} |",
    f"cannot be told | {tracing.UNKNOWN_RISE:g}, sigma of the logarithm "
    f"{tracing.UNKNOWN_RISE_SPREAD} |",
    f"from level | {math.degrees(tracer_place.CLOCK_U):.0f}°; "
    f"{math.degrees(tracer_place.TILT_U):.0f}° |",
    f"band to band | u {percent(tracing.UNEVEN_U)}; u {percent(tracing.PATCH_U)} |",
    f"what is mirrored | u {tracing.MIRRORED_U:g} K, times",
    f"patches hang together | {null.PATCH_LENGTH} m |",
    f"bins along a strip at most | {profile.MOST_BINS} |",
    f"degrees of freedom of the differences | {profile.FREEDOM:g} |",
    f"scatter of sound supply over {null.PATCH_LENGTH} m | {percent(profile.SCATTER_ALONG)} |",
    f"radiance within a measuring spot | {percent(spreading.SPOT_SHARE)} |",
    f"prior of local damage in a region | {local_damage.PRIOR_LOCAL} |",
    f"| {local_damage.RISES[0]} to {local_damage.RISES[-1]:.0f}, all factors equally likely |",
    f"| {local_damage.SHORTEST} m to {local_damage.LONGEST_SHARE} of the region,",
    "| {}, {} and {} m, rough".format(*local_damage.PATCH_LENGTHS),
    "| {} to {}, about log-normal |".format(*local_damage.SCATTER_FACTORS[[0, -1]]),
    f"a sound pipe's own loss along it | {percent(local_damage.SCATTER_ALONG)} |",
    f"first looked at with {frame_assessment.FIRST_LOOK_DRAWS} draws",
    f"Stretches below {percent(stretch_results.SMALLEST_PROBABILITY)} are not listed",
    f"is within {percent(bare.NEAR_FLUID)} of the fluid's temperature",
    f"bare steel | {bare.BARE_EMISSIVITY.value}, u {bare.BARE_EMISSIVITY.u} |",
    f"outside of the wall | 0 to {percent(bare.WALL_DROP)} of fluid minus air |",
    f"cut ends lose or shelter | {percent(bare.ENDS_U)} |",
    f"prior of bare against a missing sector | {opening.PRIOR_BARE} |",
    f"width of an opening | {math.degrees(opening.NARROWEST):.0f} to "
    f"{math.degrees(opening.WIDEST):.0f}°,",
    f"walls shelter the pipe in it | 0 to {percent(bare.SHELTER)} |",
    f"coefficient at a cut face | {bare.CUT_FACE_COEFFICIENT:g} W",
    f"beside the pipe | {opening.SMALLEST_SCATTER:g} K, {percent(opening.GLOW_SHARE)} of",
    f"shows from | {percent(opening.HOT_SHARE)} of the strongest contrast, "
    f"u {percent(opening.HOT_SCATTER)} |",
    f"least likelihood of a place across | {opening.FLOOR},",
    f"Each kind is drawn {kind_families.SAMPLES} times with",
    f"up to {kind_families.DENSER[1]} times as conductive",
    "is an air gap of {:g} to {:g} W/(m² K)".format(*kind_families.GAP_COEFFICIENT),
    f"the edges | {kinds.RISE_KERNEL}, {kinds.LENGTH_KERNEL}, {kinds.EDGE_KERNEL} |",
    f"of their own | {kinds.SHAPE_KERNEL}; {kinds.SHAPE_INDEPENDENT} |",
    f"over that of the likeliest kind | {kinds.OTHERWISE} |",
    f"lens and sampling blur | {kind_families.BLUR_SIGMA} px |",
    "compressed over sound lagging | {:g} to {:g} |".format(*kind_families.DENSER),
    f"a pipe that is seen, at most | {kind_families.CUT_FACE} of its rise |",
    f"the fewest kinds that hold {percent(kind_words.TOGETHER)};",
    f"unevenness of sound lagging around the pipe | u {percent(hidden_side.UNEVENNESS)} |",
    f"prior of damage all round | {around_pipe.PRIOR_ALL_ROUND} |",
    f"width of a damaged sector | {math.degrees(around_pipe.NARROWEST):.0f} to "
    f"{math.degrees(around_pipe.WIDEST):.0f}°,",
    f"else anywhere | {around_pipe.PRIOR_BOTTOM}, {around_pipe.PRIOR_TOP} |",
    f"about top or bottom | u {math.degrees(around_pipe.TOP_U):.0f}° each |",
    f"less one | {around_pipe.SMALLEST_RISE} to {around_pipe.LARGEST_RISE:g}, all factors",
    f"strongest band | u {percent(around_pipe.BAND_MODEL_U)}; u {percent(around_pipe.TILT_U)}; "
    f"u {percent(around_pipe.STRONGEST_U)} |",
    f"damage goes all round | u {percent(around_pipe.EVEN_U)} |",
    f"spreads nothing | {around_pipe.PRIOR_UNSPREAD} |",
    f"where one has {percent(stretch_side.NAMED_FROM)} or more",
    f"pipes steeper than {hidden_side.STEEPEST_DEG:.0f}°",
    *(f"| {s.mean:.2f} | {s.sigma:.2f} | {s.prior:g} |" for s in joint.STATES),
    f"more than {joint.LARGEST_DISAGREEMENT} u away from every state",
    f"sound loss is below {observe.SMALLEST_SOUND_LOSS:g} W/m",
    f"more than {percent(verdict.INFEASIBLE_SHARE)} of the draws are beyond",
    f"narrower than {percent(verdict.INDICATIVE_WIDTH)} of its median",
    f"narrower than {percent(verdict.QUANTIFIED_WIDTH)}; three measuring spots",
    f"at {verdict.VISIBLE_RISE_SIGMAS:g} u of the contrast "
    f"({verdict.VISIBLE_RISE_SIGMAS_METAL:g} u at emissivity below {verdict.METAL_EMISSIVITY})",
    f"valve, {bare_length('valve')}{fitting_equivalent_length('valve', False).amount.source} |",
    f"pair of flanges, {bare_length('flange')}",
    f"valve, {clad_length('valve')}",
    f"pair of flanges, {clad_length('flange')}",
    f"valve, {bare_on_clad('valve')}",
    f"pair of flanges, {bare_on_clad('flange')}",
    f"of a clad line for the component at hand | {percent(components.PRINTED_U)} |",
    f"for the component at hand, beyond its u | {percent(components.SHAPE_U)} |",
    f"loss by what is seen of it | {percent(components.UNSEEN_U)} |",
    f"by its silhouette, by print or by both | {percent(component_estimates.AREA_U)} |",
    f"{percent(hanger_share(indoors=True).value)} of the line's loss indoors, "
    f"{percent(hanger_share(indoors=False).value)} outdoors",
    f"the {components.FAR_PERCENTILE:.0f}th percentile of the outline",
    f"more than {percent(components.MOST_CLIPPED)} of the outline is clipped",
    f"above {cautions.TOUCH_CAUTION - ZERO_CELSIUS:.1f} °C",
]


@pytest.mark.parametrize("value", VALUES)
def test_a_value_on_the_page_is_the_program_s(value):
    assert value in PAGE


def test_words_for_numbers():
    assert observe.BANDS_OF_ANGLE == 5
    assert "Five bands of angle" in PAGE
    assert components.BODY_FROM == 0.5
    assert "less than half as far from the air" in PAGE
    assert joint.MOST_TOGETHER == 5
    assert "More than five regions in a frame are taken in groups of five" in PAGE
    assert (frame_draws.SHARED_CALIBRATION, frame_draws.SHARED_CONVECTION) == (0.5, 2 / 3)
    assert "| 1/2, 2/3 of the variance |" in PAGE
    assert (local_damage.MISFIT, local_damage.MISFIT_ELSEWHERE) == (3, 7)
    assert "a logarithm of 3 counts for nothing, of 7 where no run" in PAGE
    assert survey_joint.LEAST_VARIANCE == 0.5
    assert "no surer than half of the prior's variance" in PAGE
    assert verdict.SPOTS_ACROSS == 3
    assert "by at least a tenth" in PAGE


def test_what_a_plan_imagines():
    rows = [
        f"{plan.Viewpoint().columns} pixels along a row",
        f"{plan.FIELD_OF_VIEW_DEG:g}° of view and {plan.NOISE:g} K of noise",
        f"over {percent(plan.DRAWN_SHARE)} of the width",
        f"{plan.LENGTHS[0]:g} m and {plan.LENGTHS[1]:g} m, is found by {detectable.PROFILES} prof",
    ]
    assert [row for row in rows if row not in PAGE] == []
    assert detectable.DETECTION == 0.95
    assert detectable.FALSE_ALARM == 0.05


def test_what_each_measurement_would_tell():
    rows = [
        f"the foil: the mean over the half space, without what the region mirrors itself |"
        f" {references.FOIL_U:g} K",
        f"{advice.BACKGROUND_U:g} K of the probe, {references.BACKGROUND_EMISSIVITY_U:g} K of",
        f"| air temperature | itself | {advice.AIR_U:g} K |",
        f"| surroundings | their temperature | {advice.SURROUNDINGS_U:g} K |",
        f"{advice.WIND_U:g} m/s or {percent(advice.WIND_U_RELATIVE)}, the larger",
        f"| inside temperature | itself | {advice.INSIDE_U:g} K |",
        f"logarithm of the specified resistance | {advice.LAGGING_U:g} |",
        f"{advice.HOUR_LEAVES:g} is left |",
        f"sharper than {advice.SHARPEST:g} of the draws' spread",
    ]
    assert [row for row in rows if row not in PAGE] == []
    assert advice.CLOSER_LEAVES == 1 / 3
    assert "transmission of the air path | a third is left |" in PAGE
    assert advice.READINGS == (0.1, 0.3, 0.5, 0.7, 0.9)
    assert advice.LEAST_GAIN == 0.1

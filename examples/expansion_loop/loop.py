"""How wide should the bore be behind an expansion, so that most of the pressure comes back?"""

from scipy.optimize import minimize_scalar

import fem_flow as ff

case = ff.Case(
    title="Expansion behind a 10 mm bore",
    part={
        "script": "sudden_expansion",
        "shape": "round",
        "small_bore": "10 mm",
        "inlet_leg": "10 mm",
        "outlet_leg": "250 mm",
        "edge_radius": "0.2 mm",
    },
    fluid={"name": "ISO VG 32", "temperature": "60 degC"},
    ports={"inlet": {"flow_in": "3 L/min"}, "outlet": {"static_pressure": "0 bar"}},
    accuracy={"target": "0.3 Pa", "of": ["static_pressure_drop inlet outlet"]},
)
results = {}  # bore in mm -> result
START = 12.0


def pressure_lost(bore):
    """Static pressure at the inlet minus that at the outlet, Pa; a design that cannot be computed counts as a very bad one."""
    try:
        result = ff.run(case.with_(large_bore=f"{bore} mm"))
    except (ff.CaseError, ff.GeometryError, ff.NoSteadySolution) as error:
        print(f"{bore:6.2f} mm  {type(error).__name__} ({error.reason}): {error}")
        return 1e6
    lost = result["static_pressure_drop", "inlet", "outlet"]
    breaks = [check.check for check in result.found if check.verdict == "breaks"]
    print(f"{bore:6.2f} mm  {lost.value:8.2f} Pa +- {lost.error_bar:.2f} Pa")
    if breaks:
        print(f"{bore:6.2f} mm  left out: {', '.join(breaks)} breaks")
        return 1e6
    results[bore] = result
    return lost.value


pressure_lost(10.2)  # narrower than its own rounded edge allows: the loop goes on
pressure_lost(START)
best = minimize_scalar(pressure_lost, bounds=(11.0, 26.0), method="bounded", options={"xatol": 0.2})

first, last = (results[bore]["static_pressure_drop", "inlet", "outlet"] for bore in (START, best.x))
gain, noise = first.value - last.value, first.error_bar + last.error_bar
head = results[best.x]["total_pressure_drop", "inlet", "outlet"].value - last.value  # difference of the velocity heads
print(f"\nbest bore: {best.x:.1f} mm, where the pressure rises by {-last.value:.1f} Pa")
print(f"that is {-100 * last.value / head:.0f} % of the velocity head given up")
print(f"gain over {START:g} mm: {gain:.1f} Pa, {gain / noise:.0f} times the error bars of both")

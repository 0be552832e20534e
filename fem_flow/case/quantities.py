"""The figures that a result can hold: name, unit, what each is of, and its one-line definition."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True)
class QuantityKind:
    """One row of the table of figures.

    Attributes
    ----------
    unit : unit of the value, ``"1"`` for a pure number
    of : ``"port or section"``, ``"port"``, ``"two ports"``, ``"throat"``, ``"wall"``, ``"region"`` (or no name)
        or ``"part"`` (no name)
    definition : as printed next to the number
    planar_only : not given for axisymmetric parts
    """

    unit: str
    of: str
    definition: str
    planar_only: bool = False


def _forces(axis: str, planar_only: bool) -> dict[str, QuantityKind]:
    name, whole = f"force_{axis}", f"{axis} component of the force of the fluid on the wall, pressure counted from ambient"
    return {
        name: QuantityKind("N", "wall", whole, planar_only),
        f"{name}_pressure": QuantityKind("N", "wall", f"share of {name} that the pressure carries", planar_only),
        f"{name}_viscous": QuantityKind("N", "wall", f"share of {name} that the viscous stress carries", planar_only),
    }


QUANTITIES: dict[str, QuantityKind] = {
    "flow_rate": QuantityKind(
        "m^3/s", "port or section", "volume flow of the whole part, into the passage; through a section, towards +x or +y"
    ),
    "mean_velocity": QuantityKind("m/s", "port or section", "flow rate over area"),
    "area": QuantityKind("m^2", "port or section", "area of the whole part's section"),
    "static_pressure": QuantityKind("Pa", "port or section", "flow-weighted pressure, counted from ambient"),
    "total_pressure": QuantityKind("Pa", "port or section", "flow-weighted pressure plus half density times speed squared"),
    "kinetic_energy_coefficient": QuantityKind(
        "1", "port or section", "flux of kinetic energy over that of a uniform profile with the same flow"
    ),
    "hydraulic_diameter": QuantityKind(
        "m", "port or section", "tube: its bore; annulus: twice its gap; planar: twice its width"
    ),
    "reynolds_number": QuantityKind(
        "1", "port or section", "density times mean velocity times hydraulic diameter over viscosity"
    ),
    "flow_share": QuantityKind("1", "port", "share of the flow leaving the part that leaves here"),
    "static_pressure_drop": QuantityKind("Pa", "two ports", "flow-weighted static pressure at the first minus at the second"),
    "total_pressure_drop": QuantityKind("Pa", "two ports", "flow-weighted total pressure at the first minus at the second"),
    "excess_pressure_drop": QuantityKind(
        "Pa", "two ports", "total pressure drop minus the developed friction of the declared legs"
    ),
    "loss_coefficient": QuantityKind(
        "1", "two ports", "excess pressure drop along the flow over half density times the larger mean velocity squared"
    ),
    "hydraulic_resistance": QuantityKind("Pa*s/m^3", "two ports", "total pressure drop over the flow that both carry"),
    "flow_coefficient_kv": QuantityKind(
        "m^3/h", "two ports", "flow of water in m^3/h at a static drop of 1 bar, from the static drop at this Reynolds number"
    ),
    "flow_coefficient_cv": QuantityKind(
        "gal/min",
        "two ports",
        "flow of water in US gal/min at a static drop of 1 psi, from the static drop at this Reynolds number",
    ),
    "discharge_coefficient": QuantityKind(
        "1", "throat", "flow over the product of the throat's area and the root of twice the total pressure drop over density"
    ),
    "wall_shear_mean": QuantityKind("Pa", "wall", "mean magnitude of the wall shear stress, weighted by area"),
    "wall_shear_min": QuantityKind("Pa", "wall", "smallest magnitude of the wall shear stress"),
    "wall_shear_max": QuantityKind("Pa", "wall", "largest magnitude of the wall shear stress"),
    "wall_shear_p99": QuantityKind("Pa", "wall", "magnitude of the wall shear stress that 99 % of the wall's area stays below"),
    "wall_shear_max_at": QuantityKind("m", "wall", "arc length where the magnitude of the wall shear stress is largest"),
    **_forces("x", planar_only=False),
    **_forces("y", planar_only=True),
    "torque": QuantityKind(
        "N*m", "wall", "torque of the fluid on the wall about the origin of the drawing, anticlockwise", planar_only=True
    ),
    "dissipated_power": QuantityKind(
        "W", "region", "viscous dissipation, the integral of 2 mu D:D over the whole part or the region named"
    ),
    "pressure_min": QuantityKind("Pa", "part", "lowest pressure, counted from ambient"),
    "narrowest_gap": QuantityKind("m", "part", "smallest distance between facing walls of the drawing"),
    "temperature_rise": QuantityKind("K", "part", "adiabatic rise: dissipated power over density, heat capacity and flow"),
    "attachment_point": QuantityKind(
        "m", "wall", "arc length where the signed wall shear stress changes sign and the flow attaches"
    ),
    "detachment_point": QuantityKind(
        "m", "wall", "arc length where the signed wall shear stress changes sign and the flow detaches"
    ),
}

NOT_BUILT = ("recirculation_volume", "dead_volume_share", "mean_residence_time", "mixing_index")
"""Figures whose names are settled but which this version does not give."""

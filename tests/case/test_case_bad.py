"""Wrong case files, each with the exact sentence that its user reads."""
# ruff: noqa: E501  (a sentence is compared as one line)

import json
import pickle

import pytest
from declarations import PARTS

from fem_flow.case.check import resolve
from fem_flow.case.model import Case
from fem_flow.errors import CaseError

POPPET = {
    "part": 'script = "poppet_valve"',
    "fluid": 'name = "ISO VG 46"\ntemperature = "40 degC"',
    "ports.inlet": 'flow_in = "12 L/min"',
    "ports.outlet": 'static_pressure = "0 bar"',
}
MANIFOLD = {
    "part": 'script = "manifold"',
    "fluid": 'name = "water"\ntemperature = "20 degC"',
    "model": 'depth = "20 mm"',
    "ports.inlet": 'flow_in = "1 L/min"',
    "ports.outlet_1": 'static_pressure = "0 bar"',
    "ports.outlet_2": 'static_pressure = "0 bar"',
}
CAVITY = {
    "part": 'script = "cavity"',
    "fluid": 'name = "water"\ntemperature = "20 degC"',
    "model": 'depth = "20 mm"',
    "walls.lid": 'velocity = "0.1 m/s"',
}

# fmt: off
PART = [
    ('lift = 1.2', '[part] lift is 1.2 without a unit; write it as text with a unit, for example lift = "1.2 mm"'),
    ('lift = "1.2"', '[part] lift is "1.2" without a unit; write it as text with a unit, for example lift = "1.2 mm"'),
    ('lift = "1.2 mn"', '[part] lift is "1.2 mn", but there is no unit mn; did you mean mm?'),
    ('lift = "1.2 bar"', '[part] lift is "1.2 bar", a pressure, where a length is expected, for example lift = "1 mm"'),
    ('lift = "1,2 mm"', '[part] lift is "1,2 mm"; write decimals with a point: lift = "1.2 mm"'),
    ('lift = "5 m m"', '[part] lift is "5 m m", an area, where a length is expected, for example lift = "1 mm"'),
    ('lift = "mm"', '[part] lift is "mm" without a number; write for example lift = "1 mm"'),
    ('lift = ""', '[part] lift is empty; write for example lift = "1 mm"'),
    ('lift = "3 mm + "', '[part] lift is "3 mm + ", but "mm +" is not a unit; write for example lift = "1 mm"'),
    ('lift = "1e400 mm"', '[part] lift is "1e400 mm", which is no finite number; write for example lift = "1 mm"'),
    ('lift = "nan mm"', '[part] lift is "nan mm", which is not one number and one unit; write for example lift = "1 mm"'),
    ('lift = "inf mm"', '[part] lift is "inf mm", which is not one number and one unit; write for example lift = "1 mm"'),
    ('lift = true', '[part] lift is true; write it as text with a unit, for example lift = "1 mm"'),
    ('lift = ["1 mm"]', '[part] lift is a list; write it as text with a unit, for example lift = "1 mm"'),
    ('lift = {a = 1}', '[part] lift is a table; write it as text with a unit, for example lift = "1 mm"'),
    ('lift = 1979-05-27', '[part] lift is a date; write it as text with a unit, for example lift = "1 mm"'),
    ('lift = nan', '[part] lift is nan, which is no finite number; write for example lift = "1 mm"'),
    ('lift = "1.2 Mm"', '[part] lift is "1.2 Mm", outside its limits; poppet_valve allows 0.05 mm to 10 mm'),
    ('lift = "1.2 MM"', '[part] lift is "1.2 MM", a quantity in MM, where a length is expected; did you mean mm?'),
    ('lift = "1/2 mm"', '[part] lift is "1/2 mm", but "/2 mm" is not a unit; write for example lift = "1 mm"'),
    ('lift = "1 200 mm"', '[part] lift is "1 200 mm", but "200 mm" is not a unit; write for example lift = "1 mm"'),
    ('lift = "1.2.3 mm"', '[part] lift is "1.2.3 mm", which is not one number and one unit; write for example lift = "1 mm"'),
    ('lift = "20 mm"', '[part] lift is "20 mm", outside its limits; poppet_valve allows 0.05 mm to 10 mm'),
    ('lift = "2 cm"', '[part] lift is "2 cm", outside its limits; poppet_valve allows 0.05 mm to 10 mm'),
    ('lift = "0 mm"', '[part] lift is "0 mm", outside its limits; poppet_valve allows 0.05 mm to 10 mm'),
    ('lift = "-1 mm"', '[part] lift is "-1 mm", outside its limits; poppet_valve allows 0.05 mm to 10 mm'),
    ('lift = "9**9**9 mm"', '[part] lift is "9**9**9 mm", but "**9**9 mm" is not a unit; write for example lift = "1 mm"'),
    ('lift = "1 mm^9^9^9"', '[part] lift is "1 mm^9^9^9", but "mm^9^9^9" is not a unit; write for example lift = "1 mm"'),
    ('lift = "__import__(\'os\')"', '[part] lift is "__import__(\'os\')", which is not one number and one unit; write for example lift = "1 mm"'),
    ('lift = "1.2 mil"', '[part] lift is "1.2 mil", an angle, where a length is expected; write thou for a thousandth of an inch, for example lift = "1 mm"'),
    ('lift = "1 mm # x"', '[part] lift is "1 mm # x", but "mm # x" is not a unit; write for example lift = "1 mm"'),
    ('lift = "12 mm; 3"', '[part] lift is "12 mm; 3", but "mm; 3" is not a unit; write for example lift = "1 mm"'),
    ('lift = "1 µm"', '[part] lift is "1 µm", outside its limits; poppet_valve allows 0.05 mm to 10 mm'),
    ('lift = "5 %"', '[part] lift is "5 %", a pure number, where a length is expected, for example lift = "1 mm"'),
    ('lift = "3 \'"', '[part] lift is "3 \'", but "\'" is not a unit; write for example lift = "1 mm"'),
    ('lift = "1 m^2"', '[part] lift is "1 m^2", an area, where a length is expected, for example lift = "1 mm"'),
    ('seat_angle = 45', '[part] seat_angle is 45 without a unit; write it as text with a unit, for example seat_angle = "45 deg"'),
    ('seat_angle = "45"', '[part] seat_angle is "45" without a unit; write it as text with a unit, for example seat_angle = "45 deg"'),
    ('seat_angle = "45 %"', '[part] seat_angle is "45 %", a pure number, where an angle is expected, for example seat_angle = "45 deg"'),
    ('seat_angle = "95 deg"', '[part] seat_angle is "95 deg", outside its limits; poppet_valve allows 20 deg to 80 deg'),
    ('seat_angle = "0.1 rad"', '[part] seat_angle is "0.1 rad", outside its limits; poppet_valve allows 20 deg to 80 deg'),
    ('seat_angle = "45 mm"', '[part] seat_angle is "45 mm", a length, where an angle is expected, for example seat_angle = "45 deg"'),
    ('stem = "neckd"', '[part] stem is "neckd"; it can be plain, necked; did you mean necked?'),
    ('stem = 3', '[part] stem is 3; write a word in quotes, for example stem = "plain"'),
    ('stem = "round"', '[part] stem is "round"; it can be plain, necked'),
    ('stem = true', '[part] stem is true; write a word in quotes, for example stem = "plain"'),
    ('guides = 2.5', '[part] guides is 2.5; it is a count, write a whole number, for example guides = 0'),
    ('guides = "2"', '[part] guides is "2"; write it without quotes, guides = 2'),
    ('guides = "2 mm"', '[part] guides is "2 mm"; it is a count without a unit, for example guides = 0'),
    ('guides = true', '[part] guides is true; it is a count, for example guides = 0'),
    ('guides = 9', '[part] guides is 9, outside its limits; poppet_valve allows 0 to 4'),
    ('guides = -1', '[part] guides is -1, outside its limits; poppet_valve allows 0 to 4'),
    ('guides = inf', '[part] guides is inf, which is nothing to compute with; write for example guides = 0'),
    ('guides = 10000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000000', '[part] guides is a huge number, which is nothing to compute with; write for example guides = 0'),
    ('ratio = "2"', '[part] ratio is "2"; write it without quotes, ratio = 2'),
    ('ratio = "2 mm"', '[part] ratio is "2 mm"; it is a pure number without a unit, for example ratio = 1.5'),
    ('ratio = "50 %"', '[part] ratio is "50 %"; it is a pure number without a unit, for example ratio = 1.5'),
    ('ratio = 0.5', '[part] ratio is 0.5, outside its limits; poppet_valve allows at least 1.0'),
    ('ratio = true', '[part] ratio is true; it is a pure number, for example ratio = 1.5'),
    ('ratio = nan', '[part] ratio is nan, which is nothing to compute with; write for example ratio = 1.5'),
    ('vented = "yes"', '[part] vented is "yes"; write true or false, without quotes'),
    ('vented = 1', '[part] vented is 1; write true or false, without quotes'),
    ('lfit = "1 mm"', '[part] lfit is not known: poppet_valve has no such parameter; did you mean lift?'),
    ('zzz = "1 mm"', '[part] zzz is not known: poppet_valve has no such parameter; it has bore, lift, seat_angle, stem, guides, ratio, vented'),
    ('file = "a.dxf"', '[part] has both script and file; keep one of them'),
    ('unit = "mm"', '[part] unit is known but not built in this version; it goes with file, and a script says its own unit'),
    ('kind="planar"', '[part] kind is known but not built in this version; it goes with file, and a script says its own kind'),
    ('inside=["1 mm","2 mm"]', '[part] inside is known but not built in this version; it goes with file'),
]

FLUID = [
    ('name = "ISO VG 46"\n', '[fluid] has no temperature; ISO VG 46 needs one, for example temperature = "40 degC"'),
    ('name = "ISO VG 46"\ntemperature = "40 C"', '[fluid] temperature is "40 C", an electric charge, where a temperature is expected; write degC for degrees Celsius, for example temperature = "40 degC"'),
    ('name = "ISO VG 46"\ntemperature = 40', '[fluid] temperature is 40 without a unit; write it as text with a unit, for example temperature = "40 degC"'),
    ('name = "ISO VG 46"\ntemperature = "40"', '[fluid] temperature is "40" without a unit; write it as text with a unit, for example temperature = "40 degC"'),
    ('name = "ISO VG 46"\ntemperature = "40 F"', '[fluid] temperature is "40 F", a quantity in F, where a temperature is expected; write degF for degrees Fahrenheit, for example temperature = "40 degC"'),
    ('name = "ISO VG 46"\ntemperature = "-300 degC"', '[fluid] temperature is "-300 degC", which is below absolute zero; write for example temperature = "40 degC"'),
    ('name = "ISO VG 46"\ntemperature = "140 degC"', '[fluid] temperature is "140 degC"; ISO VG 46 is known from 0 to 100 degC, and nothing is extrapolated'),
    ('name = "ISO VG 46"\ntemperature = "40 bar"', '[fluid] temperature is "40 bar", a pressure, where a temperature is expected, for example temperature = "40 degC"'),
    ('name = "ISO VG 46"\ntemperature = "40°"', '[fluid] temperature is "40°", an angle, where a temperature is expected, for example temperature = "40 degC"'),
    ('name = "watr"\ntemperature = "20 degC"', '[fluid] name is "watr", which is not in the fluid library; did you mean water?'),
    ('name = "air"\ntemperature = "20 degC"', '[fluid] name is "air", which is not in the fluid library; did you mean dry air?'),
    ('name = "honey"\ntemperature = "20 degC"', '[fluid] name is "honey", which is not in the fluid library; it has water, dry air, ISO VG 32, ISO VG 46, ISO VG 68, glycerol-water'),
    ('name = "oxygen"\ntemperature = "20 degC"', '[fluid] name is "oxygen"; oxygen and oxygen-enriched gas are refused, for ignition decides there and not the flow: see the oxygen-service guides ASTM G88 and MNL36, ISO 15001 and those of CGA and EIGA'),
    ('name = "O2"\ntemperature = "20 degC"', '[fluid] name is "O2"; oxygen and oxygen-enriched gas are refused, for ignition decides there and not the flow: see the oxygen-service guides ASTM G88 and MNL36, ISO 15001 and those of CGA and EIGA'),
    ('name = "Oxygen-enriched air"\ntemperature = "20 degC"', '[fluid] name is "Oxygen-enriched air"; oxygen and oxygen-enriched gas are refused, for ignition decides there and not the flow: see the oxygen-service guides ASTM G88 and MNL36, ISO 15001 and those of CGA and EIGA'),
    ('name = "water"\ntemperature = "0 degC"', '[fluid] temperature is "0 degC"; water is known from 0.01 to 99.9 degC, and nothing is extrapolated'),
    ('name = "glycerol-water"\ntemperature = "20 degC"', '[fluid] is glycerol-water, which needs the share of glycerol by mass, for example glycerol = "60 %"'),
    ('name = "glycerol-water"\ntemperature = "20 degC"\nglycerol = "120 %"', '[fluid] glycerol is "120 %", outside 0 % to 100 %'),
    ('name = "glycerol-water"\ntemperature = "20 degC"\nglycerol = 0.6', '[fluid] glycerol is 0.6 without a unit; write it as text with a unit, for example glycerol = "0.6 %"'),
    ('name = "glycerol-water"\ntemperature = "20 degC"\nglycerol = 60', '[fluid] glycerol is 60 without a unit; write it as text with a unit, for example glycerol = "60 %"'),
    ('name = "water"\ntemperature = "20 degC"\nglycerol = "60 %"', '[fluid] has glycerol, which goes with glycerol-water and not with water'),
    ('name = "ISO VG 46"\ndensity = "870 kg/m^3"', '[fluid] has name and density; take a fluid of the library (name, temperature) or give density and viscosity'),
    ('density = "870 kg/m^3"', '[fluid] has density but no viscosity; give viscosity = "40 mPa*s" or kinematic_viscosity = "46 cSt"'),
    ('viscosity = "40 mPa*s"', '[fluid] says no fluid; give name and temperature (name = "ISO VG 46"), or density and viscosity'),
    ('density = "870 kg/m^3"\nviscosity="40 mPa*s"\nkinematic_viscosity = "46 cSt"', '[fluid] has both viscosity and kinematic_viscosity; keep one of them'),
    ('density = "870 kg/m^3"\nviscosity = "46 cSt"', '[fluid] viscosity is "46 cSt", a kinematic viscosity, where a dynamic viscosity is expected, for example viscosity = "40 mPa*s"'),
    ('density = "870 kg/m^3"\nkinematic_viscosity = "46 mPa*s"', '[fluid] kinematic_viscosity is "46 mPa*s", a dynamic viscosity, where a kinematic viscosity is expected, for example kinematic_viscosity = "46 cSt"'),
    ('density = "870 kg/m^3"\nviscosity = "0 mPa*s"', '[fluid] viscosity is "0 mPa*s", but must be above zero, for example viscosity = "40 mPa*s"'),
    ('density = "-870 kg/m^3"\nviscosity = "40 mPa*s"', '[fluid] density is "-870 kg/m^3", but must be above zero, for example density = "870 kg/m^3"'),
    ('density = "870"\nviscosity = "40 mPa*s"', '[fluid] density is "870" without a unit; write it as text with a unit, for example density = "870 kg/m^3"'),
    ('density = 870\nviscosity = "40 mPa*s"', '[fluid] density is 870 without a unit; write it as text with a unit, for example density = "870 kg/m^3"'),
    ('density = "870 kg/m^3"\nviscosity = "40 MPa*s"', '[fluid] viscosity is "40 MPa*s", which is 4e+07 Pa*s and beyond what is plausible (1e-07 to 1e+06 Pa*s); check the unit'),
    ('density = "870 kg/m^3"\nviscosity = "40 mPa*s"\ntemperature = "40 degC"', '[fluid] has temperature but no name; temperature is for fluids of the library, for example name = "ISO VG 46"'),
    ('', '[fluid] says no fluid; give name and temperature (name = "ISO VG 46"), or density and viscosity'),
    ('visc = "40 mPa*s"', '[fluid] visc is not known; did you mean viscosity?'),
    ('name = "ISO VG 46"\ntemprature = "40 degC"', '[fluid] temprature is not known; did you mean temperature?'),
    ('[fluid.power_law]\nconsistency = "2 Pa*s^0.5"', '[fluid.power_law] is known but not built in this version'),
    ('[fluid.bingham]', '[fluid.bingham] is known but not built in this version'),
    ('carreau = 3', '[fluid] carreau is known but not built in this version'),
    ('density = "870 kg/m^3"\nviscosity = "40 mPa*s"\nheat_capacity = "1900 J/kg"', '[fluid] heat_capacity is "1900 J/kg", a quantity in J/kg, where a specific heat capacity is expected, for example heat_capacity = "1900 J/(kg*K)"'),
    ('density = "870 kg/m3"\nviscosity = "40 mPa*s"', '[fluid] density is "870 kg/m3", but there is no unit kg/m3; did you mean kg/m^3?'),
]

INLET = [
    ('flow_in = 12', '[ports.inlet] flow_in is 12 without a unit; write it as text with a unit, for example flow_in = "12 L/min"'),
    ('flow_in = "12 lpm"', '[ports.inlet] flow_in is "12 lpm", but there is no unit lpm; write L/min, for example flow_in = "12 L/min"'),
    ('flow_in = "12 l/m"', '[ports.inlet] flow_in is "12 l/m", an area, where a volume flow or a mass flow is expected; write L/min, for example flow_in = "12 L/min"'),
    ('flow_in = "12 gpm"', '[ports.inlet] flow_in is "12 gpm", but there is no unit gpm; write gal/min, for example flow_in = "12 L/min"'),
    ('flow_in = "-3 L/min"', '[ports.inlet] flow_in is "-3 L/min"; for the other direction write flow_out = "3 L/min"'),
    ('flow_out = "-3 kg/min"', '[ports.inlet] flow_out is "-3 kg/min"; for the other direction write flow_in = "3 kg/min"'),
    ('flow_in = "0 L/min"', '[ports.inlet] flow_in is "0 L/min"; for a port without flow write closed = true'),
    ('flow_in = "12 bar"', '[ports.inlet] flow_in is "12 bar", a pressure, where a volume flow or a mass flow is expected, for example flow_in = "12 L/min"'),
    ('flow_in = "1 m/s"', '[ports.inlet] flow_in is "1 m/s", a velocity, where a volume flow or a mass flow is expected, for example flow_in = "12 L/min"'),
    ('velocity_in = "12 L/min"', '[ports.inlet] velocity_in is "12 L/min", a volume flow, where a velocity is expected, for example velocity_in = "0.5 m/s"'),
    ('velocity_in = "-1 m/s"', '[ports.inlet] velocity_in is "-1 m/s"; for the other direction write velocity_out = "1 m/s"'),
    ('static_pressure = "2 barg"', '[ports.inlet] static_pressure is "2 barg", but there is no unit barg; write bar, with ambient absolute and port pressures counted from it, for example static_pressure = "0 bar"'),
    ('static_pressure = "2 psig"', '[ports.inlet] static_pressure is "2 psig", but there is no unit psig; write psi, with ambient absolute and port pressures counted from it, for example static_pressure = "0 bar"'),
    ('static_pressure = 0', '[ports.inlet] static_pressure is 0 without a unit; write it as text with a unit, for example static_pressure = "0 bar"'),
    ('static_pressure = "0"', '[ports.inlet] static_pressure is "0" without a unit; write it as text with a unit, for example static_pressure = "0 bar"'),
    ('static_presure = "0 bar"', '[ports.inlet] static_presure is not known; did you mean static_pressure?'),
    ('', '[ports.inlet] has no condition; give one of flow_in, flow_out, velocity_in, velocity_out, static_pressure, total_pressure or closed = true'),
    ('flow_in = "1 L/min"\nstatic_pressure = "0 bar"', '[ports.inlet] has flow_in and static_pressure; a port takes one condition'),
    ('closed = false', '[ports.inlet] closed is false, which says nothing; give the port another condition instead'),
    ('closed = "true"', '[ports.inlet] closed is "true"; write closed = true'),
    ('closed = 1', '[ports.inlet] closed is 1; write closed = true'),
    ('profile = "free"', '[ports.inlet] profile is known but not built in this version'),
    ('flow_in = "1 L/min"\nprofile = "free"', '[ports.inlet] profile is known but not built in this version'),
    ('leg = "3 mm"', '[ports.inlet] leg is known but not built in this version'),
    ('[ports.inlet.line]\nto = "0 bar"', '[ports.inlet.line] is known but not built in this version'),
    ('zzz = 3', '[ports.inlet] zzz is not known; this table may have flow_in, flow_out, velocity_in, velocity_out, static_pressure, total_pressure, closed, line, profile, leg'),
    ('flow_in = ["1 L/min"]', '[ports.inlet] flow_in is a list; write it as text with a unit, for example flow_in = "12 L/min"'),
    ('flow_in = "12 sccm"', '[ports.inlet] flow_in is "12 sccm", but there is no unit sccm; give the mass flow, or the volume flow at the pressure of the passage, for example flow_in = "12 L/min"'),
    ('flow_in = "1e30 L/min"', '[ports.inlet] flow_in is "1e30 L/min", which is 1.67e+25 m^3/s and beyond what is plausible (1e-21 to 100000 m^3/s); check the unit'),
    ('static_pressure = "0 bar"', '[ports] gives the same pressure everywhere, so nothing would flow; change one pressure or give a flow'),
]

TABLES = [
    ({'part': 'scrpt = "poppet_valve"'}, '[part] needs script = "...", the name of a shipped part or the path of a script; did you mean script where it says scrpt?'),
    ({'part': 'lift = "1 mm"'}, '[part] needs script = "...", the name of a shipped part or the path of a script'),
    ({'part': 'file = "a.dxf"'}, '[part] has file, which is known but not built in this version; give script = "..." instead'),
    ({'part': 'script = 3'}, '[part] script is 3; write text in quotes, for example script = "poppet_valve"'),
    ({'part': 'script = ""'}, '[part] script is empty; write for example script = "poppet_valve"'),
    ({'ports.inlte': 'flow_in = "1 L/min"', 'ports.inlet': None}, '[ports.inlte] is not a port of poppet_valve; it has inlet, outlet; did you mean inlet?'),
    ({'ports.drain': 'closed = true'}, '[ports.drain] is not a port of poppet_valve; it has inlet, outlet'),
    ({'ports.outlet': None}, '[ports.outlet] is missing: every port of poppet_valve needs a condition, such as static_pressure = "0 bar" or closed = true'),
    ({'ports.outlet': 'flow_out = "12 L/min"'}, '[ports] gives no pressure anywhere; write [ports.outlet] static_pressure = "0 bar" instead of its flow, which then follows from the others'),
    ({'ports.outlet': 'closed = true'}, '[ports] leaves only inlet open, whose flow could not leave; open another port, for example static_pressure = "0 bar"'),
    ({'ports.outlet': 'closed = true', 'ports.inlet': 'closed = true'}, '[ports] closes every port and no wall moves, so nothing would flow; open a port, for example static_pressure = "0 bar"'),
    ({'ports.inlet': 'static_pressure = "1 bar"', 'ports.outlet': 'closed = true'}, '[ports] leaves only inlet open, so nothing would flow; open another port'),
    ({'ports.inlet': None, 'ports.outlet': None}, '[ports.inlet] is missing: every port of poppet_valve needs a condition, such as static_pressure = "0 bar" or closed = true'),
    ({'ports.inlet': None, 'ports.outlet': None, 'ports': 'inlet = "3 L/min"'}, '[ports] inlet is "3 L/min"; write a table, for example [ports.inlet]'),
    ({'ports.inlet': 'static_pressure = "-2 bar"', 'model': 'ambient = "1 bar"'}, '[ports.inlet] static_pressure is "-2 bar" against an ambient of 1 bar, which is below zero absolute; port pressures are counted from ambient'),
    ({'walls.popet': 'slip = true'}, '[walls.popet] is not a wall of poppet_valve; it has poppet, seat, housing; did you mean poppet?'),
    ({'walls.axis': 'slip = true'}, "[walls.axis] is the part's axis and no wall of poppet_valve; its walls are poppet, seat, housing"),
    ({'walls.inlet': 'slip = true'}, '[walls.inlet] is a port and no wall of poppet_valve; its walls are poppet, seat, housing'),
]

MODEL = [
    ('ambient = "0 bar"', '[model] ambient is "0 bar", but must be above zero; it is the absolute pressure of the surroundings, for example ambient = "1.01325 bar"'),
    ('ambient = "-1 bar"', '[model] ambient is "-1 bar", but must be above zero; it is the absolute pressure of the surroundings, for example ambient = "1.01325 bar"'),
    ('ambient = 1', '[model] ambient is 1 without a unit; write it as text with a unit, for example ambient = "1 bar"'),
    ('ambient = "1 barg"', '[model] ambient is "1 barg", but there is no unit barg; write bar, with ambient absolute and port pressures counted from it, for example ambient = "1.01325 bar"'),
    ('inertia = "no"', '[model] inertia is "no"; write inertia = true, or false for Stokes flow'),
    ('inertia = 0', '[model] inertia is 0; write inertia = true, or false for Stokes flow'),
    ('depth = "3 mm"', '[model] depth is "3 mm", but poppet_valve is axisymmetric here and its numbers are for the full turn; delete this line'),
    ('cover_plates = true', '[model] cover_plates is known but not built in this version'),
    ('ambiant = "1 bar"', '[model] ambiant is not known; this table may have inertia, ambient, depth, cover_plates; did you mean ambient?'),
]

MANIFOLD_TABLES = [
    ({'model': None}, '[model] depth is missing: manifold is planar here; write depth = "25 mm", its size into the page'),
    ({'model': 'depth = "0 mm"'}, '[model] depth is "0 mm", but must be above zero, for example depth = "25 mm"'),
    ({'model': 'depth = "-1 mm"'}, '[model] depth is "-1 mm", but must be above zero, for example depth = "25 mm"'),
    ({'model': 'depth = 20'}, '[model] depth is 20 without a unit; write it as text with a unit, for example depth = "20 mm"'),
    ({'part': 'script = "manifold"\npad = "20 mm"'}, '[part] pad is "20 mm", a length, where an area is expected, for example pad = "20 mm^2"'),
    ({'ports.outlet_3': 'closed = true'}, '[ports.outlet_3] is not a port of manifold; it has inlet, outlet_1, outlet_2; did you mean outlet_2?'),
]

CAVITY_TABLES = [
    ({'walls.lid': None}, '[ports] is empty and no wall moves, so nothing would flow; let one slide: [walls.NAME] velocity = "0.1 m/s"'),
    ({'ports.inlet': 'flow_in = "1 L/min"'}, '[ports.inlet] is not a port of cavity; it has no ports'),
    ({'walls.lid': 'velocity = "0 m/s"'}, '[ports] is empty and no wall moves, so nothing would flow; let one slide: [walls.NAME] velocity = "0.1 m/s"'),
]

POPPET_WALL = [
    ('slip = false', '[walls.poppet] slip is false, which says nothing; leave the wall out, then it is a no-slip wall at rest'),
    ('slip = true\nvelocity = "1 m/s"', '[walls.poppet] has velocity and slip; a wall takes one condition'),
    ('', '[walls.poppet] says nothing; give velocity = "0.1 m/s" or slip = true, or leave the wall out (at rest)'),
    ('velocity = 1', '[walls.poppet] velocity is 1 without a unit; write it as text with a unit, for example velocity = "1 m/s"'),
    ('velocity = "1 rpm"', '[walls.poppet] velocity is "1 rpm", a rotation, where a velocity is expected, for example velocity = "0.1 m/s"'),
    ('rotation = "3000 rpm"', '[walls.poppet] rotation is known but not built in this version'),
    ('centre = ["0 mm", "0 mm"]', '[walls.poppet] centre is known but not built in this version'),
    ('velocty = "1 m/s"', '[walls.poppet] velocty is not known; this table may have velocity, slip, rotation, centre; did you mean velocity?'),
]

ACCURACY = [
    ('target = 1', '[accuracy] target is 1 without a unit; write it as text with a unit, for example target = "1 %"'),
    ('target = 0.01', '[accuracy] target is 0.01 without a unit; write it as text with a unit, for example target = "1 %"'),
    ('target = "1"', '[accuracy] target is "1" without a unit; write it as text with a unit, for example target = "1 %"'),
    ('target = "0 %"', '[accuracy] target is "0 %", but must be above 0 % and below 100 %, for example target = "1 %"'),
    ('target = "-1 %"', '[accuracy] target is "-1 %", but must be above 0 % and below 100 %, for example target = "1 %"'),
    ('target = "200 %"', '[accuracy] target is "200 %", but must be above 0 % and below 100 %, for example target = "1 %"'),
    ('target = "20 Pa"', '[accuracy] target is "20 Pa", an absolute one; name in of the figures it is for, for example of = ["total_pressure_drop"]'),
    ('target = "20 Pa"\nof = ["force_x"]', '[accuracy] target is "20 Pa", a pressure, where a force is expected, for example target = "20 N"'),
    ('target = "20 Pa"\nof = ["force_x","total_pressure_drop"]', '[accuracy] target is "20 Pa", but the figures in of have different units (N, Pa); write a percentage or name figures of one unit'),
    ('target = "20 mm"\nof = ["force_x","total_pressure_drop"]', '[accuracy] target is "20 mm", a length, where a force or a pressure is expected, for example target = "1 %"'),
    ('target = "0 Pa"\nof = ["total_pressure_drop"]', '[accuracy] target is "0 Pa", but must be above zero, for example target = "1 %"'),
    ('of = "force_x"', '[accuracy] of is "force_x"; write a list, for example of = ["total_pressure_drop inlet outlet"]'),
    ('of = []', '[accuracy] of is an empty list; write for example of = ["total_pressure_drop inlet outlet"]'),
    ('of = [3]', '[accuracy] of holds 3; write names in quotes, for example of = ["total_pressure_drop inlet outlet"]'),
    ('of = ["total_presure_drop"]', '[accuracy] of names total_presure_drop, which is no figure of a result; did you mean total_pressure_drop?'),
    ('of = ["total_pressure_drop inlet"]', '[accuracy] of names "total_pressure_drop inlet"; total_pressure_drop is of two different ports, for example "total_pressure_drop inlet outlet"'),
    ('of = ["total_pressure_drop inlet inlet"]', '[accuracy] of names "total_pressure_drop inlet inlet"; total_pressure_drop is of two different ports, for example "total_pressure_drop inlet outlet"'),
    ('of = ["total_pressure_drop inlet oulet"]', '[accuracy] of names "total_pressure_drop inlet oulet", but oulet is no port of poppet_valve; it has inlet, outlet; did you mean outlet?'),
    ('of = ["force_x popet"]', '[accuracy] of names "force_x popet", but popet is no wall of poppet_valve; it has poppet, seat, housing; did you mean poppet?'),
    ('of = ["force_y"]', '[accuracy] of names force_y, but an axisymmetric part has none'),
    ('of = ["force_x poppet","force_x poppet"]', '[accuracy] of names "force_x poppet" twice'),
    ('of = ["mixing_index"]', '[accuracy] of names mixing_index, which is known but not built in this version'),
    ('of = ["pressure_min inlet"]', '[accuracy] of names "pressure_min inlet"; pressure_min is of the whole part and takes no name'),
    ('of = ["discharge_coefficient seat"]', '[accuracy] of names "discharge_coefficient seat", but seat is no throat of poppet_valve; it has throat'),
    ('of = ["flow_share"]\ntarget = "x"', '[accuracy] target is "x", which is not one number and one unit; write for example target = "1 %"'),
    ('unknowns = 0', '[accuracy] unknowns is 0, but must be at least 1000, for example unknowns = 400_000'),
    ('unknowns = 1e5', '[accuracy] unknowns is 100000.0; write a whole number, for example unknowns = 400_000'),
    ('unknowns = "many"', '[accuracy] unknowns is "many"; write a whole number, for example unknowns = 400_000'),
    ('unknowns = true', '[accuracy] unknowns is true; write a whole number, for example unknowns = 400_000'),
    ('tarjet = "1 %"', '[accuracy] tarjet is not known; this table may have target, of, unknowns; did you mean target?'),
    ('of = [""]', '[accuracy] of holds ""; write names in quotes, for example of = ["total_pressure_drop inlet outlet"]'),
    ('target = "5 bananas"', '[accuracy] target is "5 bananas", but there is no unit bananas; write for example target = "1 %"'),
    ('target = "loose"', '[accuracy] target is "loose", which is not one number and one unit; write for example target = "1 %"'),
    ('target = "1,5 %"', '[accuracy] target is "1,5 %"; write decimals with a point: target = "1.5 %"'),
]

MESH = [
    ('size = 1', '[mesh] size is 1 without a unit; write it as text with a unit, for example size = "1 mm"'),
    ('size = "0 mm"', '[mesh] size is "0 mm", but must be above zero, for example size = "0.5 mm"'),
    ('near_walls = "1 mm"\nsize = "0.5 mm"', '[mesh] near_walls is "1 mm", larger than size "0.5 mm"; walls need the finer mesh'),
    ('', '[mesh] is empty; give size = "0.5 mm" and near_walls = "0.1 mm", or delete it'),
    ('sizes = "1 mm"', '[mesh] sizes is not known; this table may have size, near_walls; did you mean size?'),
]

WHOLE = [
    ('[part]\nscript = "poppet_valve"\nlift = 1.2 mm\n', 'line 3 is not valid TOML; write lift = "1.2 mm", in quotes'),
    ('[part]\nscript = poppet_valve\n', 'line 2 is not valid TOML; write script = "poppet_valve", in quotes'),
    ('[part]\nscript = "poppet_valve"\nlift = "1 mm\n', 'line 3 is not valid TOML; a quotation mark is missing'),
    ('[part]\nscript = "poppet_valve"\nlift = "1 mm"\nlift = "2 mm"\n', 'line 4 gives lift a second time'),
    ('[part]\nscript = "poppet_valve"\n[part]\n', 'line 3 gives [part] a second time'),
    ('[part]\nscript = "poppet_valve"\n[model]\ninertia = True', 'line 4 is not valid TOML; write inertia = true, in small letters'),
    ('', '[part] is missing; a case needs this table, for example with script = "poppet_valve"'),
    ('[part]\nscript = "poppet_valve"\nlift = 1,2 mm', 'line 3 is not valid TOML; write lift = "1.2 mm", in quotes'),
    ('part = "poppet_valve"', '[part] is "poppet_valve"; write a table, that is a line [part] with its keys below'),
    ('fluid = "water"\n[part]\nscript = "poppet_valve"\n', '[fluid] is "water"; write a table, that is a line [fluid] with its keys below'),
    ('[part]\nscript = "poppet_valve"\n[prots.inlet]\nclosed=true', '[prots] is not part of a case file; did you mean ports?'),
    ('titel = "x"\n[part]\nscript = "poppet_valve"\n[fluid]\nname="water"', 'titel is not part of a case file; did you mean title?'),
    ('title = 5\n[part]\nscript = "poppet_valve"\n', 'title is 5; write text in quotes, for example title = "Poppet check valve"'),
    ('title = ""\n[part]\nscript = "poppet_valve"\n[fluid]\nname="water"', 'title is empty; write for example title = "Poppet check valve"'),
    ('[[part]]\nscript="a"', '[part] is a list; write a table, that is a line [part] with its keys below'),
    ('[part]\nlift = "1 mm"\n[part.lift]\na=1', 'line 3 gives [part.lift] a second time'),
    ('[Part]\nscript = "poppet_valve"\n', '[Part] is not part of a case file; did you mean part?'),
    ('[part]\nscript = "poppet_valve"\n[walls]\npoppet=3\n[fluid]\nname="water"', '[walls] poppet is 3; write a table, for example [walls.poppet]'),
    ('[part]\nscript = "poppet_valve"\n[fluid]\nname="water"\n[accuracy]\nof=[["a"]]', '[accuracy] of holds a list; write names in quotes, for example of = ["total_pressure_drop inlet outlet"]'),
    ('accuracy = 3\n[part]\nscript = "poppet_valve"\n[fluid]\nname="water"', '[accuracy] is 3; write a table, that is a line [accuracy] with its keys below'),
]
# fmt: on


def toml(base: dict, changes: dict) -> str:
    """Text of the base case with whole tables replaced, added, or (None) left out."""
    tables = {**base, **changes}
    return "\n".join(f"[{name}]\n{lines}" for name, lines in tables.items() if lines is not None)


def pairs():
    for lines, sentence in PART:
        yield toml(POPPET, {"part": POPPET["part"] + "\n" + lines}), sentence
    for name, rows in (("fluid", FLUID), ("ports.inlet", INLET), ("model", MODEL), ("walls.poppet", POPPET_WALL),
                       ("accuracy", ACCURACY), ("mesh", MESH)):  # fmt: skip
        for lines, sentence in rows:
            yield toml(POPPET, {name: lines}), sentence
    for base, rows in ((POPPET, TABLES), (MANIFOLD, MANIFOLD_TABLES), (CAVITY, CAVITY_TABLES)):
        for changes, sentence in rows:
            yield toml(base, changes), sentence
    yield from WHOLE


WRONG = list(pairs())


def resolved(path):
    case = Case.read(path)
    return resolve(case, *PARTS[case.part.script])


def refusal(path) -> CaseError:
    """The error of reading a case file and checking it against its part."""
    with pytest.raises(CaseError) as caught:
        resolved(path)
    return caught.value


@pytest.mark.parametrize(("text", "sentence"), WRONG, ids=range(len(WRONG)))
def test_a_wrong_case_file_gets_its_sentence(tmp_path, text, sentence):
    path = tmp_path / "case.toml"
    path.write_text(text, encoding="utf-8")
    error = refusal(path)
    assert str(error) == f"case.toml: {sentence}"
    assert "\n" not in str(error)
    assert error.reason
    json.dumps(error.details)  # plain data
    again = pickle.loads(pickle.dumps(error))
    assert (type(again), str(again), again.reason, again.details) == (CaseError, str(error), error.reason, error.details)


def test_there_are_enough_wrong_case_files():
    assert len(WRONG) >= 200
    assert len({text for text, _ in WRONG}) == len(WRONG)


@pytest.mark.parametrize("base", [POPPET, MANIFOLD, CAVITY], ids=["poppet", "manifold", "cavity"])
def test_the_case_that_is_made_wrong_is_right(tmp_path, base):
    path = tmp_path / "case.toml"
    path.write_text(toml(base, {}))
    assert [f"ports.{port}" for port in resolved(path).ports] == [table for table in base if table.startswith("ports")]


def test_what_python_says_of_toml_is_passed_on_in_one_sentence(tmp_path):
    path = tmp_path / "case.toml"
    for text, start in (
        ("[part]\n[model\n", "case.toml: line 2 is not valid TOML; "),
        ("hello", "case.toml: is not valid TOML; "),
        ('[part]\nlift "1 mm"\n', "case.toml: line 2 is not valid TOML; "),
        ("a = " + "[" * 5000, "case.toml: is nested too deeply for a case file"),
        ("a = " + "1" * 5000, "case.toml: holds a number with too many digits"),
    ):
        path.write_text(text)
        error = refusal(path)
        assert str(error).startswith(start)
        assert "\n" not in str(error)


def test_files_that_cannot_be_read(tmp_path):
    (tmp_path / "poppet.toml").write_text("")
    (tmp_path / "latin.toml").write_bytes('title = "Größe"'.encode("latin-1"))
    (tmp_path / "wide.toml").write_bytes('title = "a"'.encode("utf-16"))
    for name, sentence in (
        ("popet.toml", f"{tmp_path}/popet.toml: there is no such file; did you mean poppet.toml?"),
        ("zzz/absent.toml", f"{tmp_path}/zzz/absent.toml: there is no such file"),
        ("", f"{tmp_path}: is a folder; give the case file itself"),
        ("latin.toml", "latin.toml: is not UTF-8 text; save it as UTF-8"),
        ("wide.toml", "wide.toml: is not UTF-8 text; save it as UTF-8"),
    ):
        error = refusal(tmp_path / name)
        assert (str(error), error.reason) == (sentence, "unreadable")


def test_details_name_file_key_and_nearest_name(tmp_path):
    path = tmp_path / "case.toml"
    path.write_text(toml(POPPET, {"ports.inlet": 'static_presure = "0 bar"'}))
    error = refusal(path)
    assert error.details["file"] == "case.toml"
    assert error.details["key"] == "ports.inlet.static_presure"
    assert error.details["nearest"] == "static_pressure"

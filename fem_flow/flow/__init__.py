"""From a named mesh and what is known at its boundaries to the steady velocity and pressure.

Inside, everything is scaled and plain arrays; SI goes in and comes out at one door, `fem_flow.flow.problem`. Assembling
(`space`, `kernels`, `system`), solving (`linear`) and steering (`steer`) are separate rooms.
"""

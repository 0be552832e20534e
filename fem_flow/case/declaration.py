"""What a part declares about itself: plain data that crosses the border of the drawing process."""

from __future__ import annotations

from dataclasses import dataclass, field


@dataclass(frozen=True)
class Parameter:
    """One dimension, count, switch or word of a part.

    A dimensional default is a string with its unit (``Parameter("12 mm")``); angles likewise (``"45 deg"``). Pure
    numbers, counts and switches are given bare; words come with ``choices``. ``low`` and ``high`` are inclusive limits
    written like the default.
    """

    default: str | bool | int | float
    low: str | int | float | None = None
    high: str | int | float | None = None
    choices: tuple[str, ...] | None = None
    says: str = ""

    def __post_init__(self):
        if self.choices is not None:
            object.__setattr__(self, "choices", tuple(self.choices))


@dataclass(frozen=True)
class Declaration:
    """What a part script says of itself.

    ``kind``, ``ports`` and ``legs`` may depend on the parameters; they are None until the script was asked with values.

    Attributes
    ----------
    name : name of the script without ``.py``
    path : where it lies
    says : first line of its docstring
    sketch : the rest of its docstring
    unit : length unit of the drawing, for example ``"mm"``
    kind : ``"planar"`` or ``"axisymmetric"``
    parameters, ports, sections : as declared, in order
    legs : straight length at each port, in the script's unit
    """

    name: str
    path: str
    says: str
    sketch: str
    unit: str
    parameters: dict[str, Parameter]
    sections: tuple[str, ...] = ()
    kind: str | None = None
    ports: tuple[str, ...] | None = None
    legs: dict[str, float] | None = field(default=None)

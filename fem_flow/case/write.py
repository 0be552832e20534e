"""A case as the text of a case file."""

from __future__ import annotations

HEADER = """\
# The case as it was run, with every default filled in.
# Walls that are not mentioned are no-slip walls at rest.

"""


def case_toml(filled: dict, header: str = HEADER) -> str:
    """TOML text of a case given as plain data; reading it back gives an equal case.

    Parameters
    ----------
    filled : ``ResolvedCase.filled``, or ``Case.to_dict()``
    header : comment lines in front
    """
    import tomli_w

    return header + tomli_w.dumps(filled)

"""The one check of arguments the engine makes: a value outside its limits is named, not clamped."""

import numpy as np
from numpy.typing import ArrayLike


def at_least(bound: float, **values: ArrayLike) -> None:
    """Refuse values below a bound; NaN and infinity count as outside.

    Parameters
    ----------
    bound : float
        Least value allowed. [unit of the values]
    **values : float or array
        The arguments by name. [any unit]

    Raises
    ------
    ValueError
        Naming the first argument outside the limit.
    """
    for name, value in values.items():
        if isinstance(value, float) and bound <= value < np.inf:
            continue
        value = np.asarray(value, dtype=float)
        if value.size and not (value.min() >= bound and value.max() < np.inf):
            raise ValueError(f"{name} must be finite and at least {bound:g}")


def positive(**values: ArrayLike) -> None:
    """Refuse values that are not finite and above zero.

    Parameters
    ----------
    **values : float or array
        The arguments by name. [any unit]

    Raises
    ------
    ValueError
        Naming the first argument outside the limit.
    """
    for name, value in values.items():
        if isinstance(value, float) and 0.0 < value < np.inf:
            continue
        value = np.asarray(value, dtype=float)
        if value.size and not (value.min() > 0.0 and value.max() < np.inf):
            raise ValueError(f"{name} must be finite and above 0")

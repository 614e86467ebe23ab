"""The one scale between amperes on the screen and whole milliamperes in the arrangement model."""

MA_PER_A = 1000


def to_ma(current_a: float) -> int:
    """Round a current [A] to the nearest whole milliampere [mA]."""
    return round(current_a * MA_PER_A)


def to_a(current_ma: float) -> float:
    """Turn milliamperes [mA] into amperes [A]."""
    return current_ma / MA_PER_A

"""The controls of the worksheets."""

from ipywidgets import FloatSlider, Layout

LABEL_CHARACTERS = 22  # of label and unit together
READOUT_CHARACTERS = 9  # what the widget has room for


def slider(
    *,
    label: str,
    unit: str,
    value: float,
    low: float,
    high: float,
    step: float,
    digits: int,
    tooltip: str,
) -> FloatSlider:
    """A slider from `low` to `high`, in the unit it shows; `digits` is the count of decimals.

    Raises ValueError when the value is out of range (the widget would change it without a word),
    when a step can't be seen in the digits, and when label or number would be cut off.
    """
    text = f"{label} ({unit})" if unit else label
    if len(text) > LABEL_CHARACTERS:
        raise ValueError(f"the label {text!r} has more than {LABEL_CHARACTERS} characters")
    if not low <= value <= high or low == high:
        raise ValueError(f"{text}: {value} does not lie in a range from {low} to {high}")
    if step <= 0 or abs(round(step, digits) - step) > 1e-9 * step:
        raise ValueError(f"{text}: steps of {step} can't be seen with {digits} decimals")
    if max(len(f"{end:.{digits}f}") for end in (low, high)) > READOUT_CHARACTERS:
        raise ValueError(f"{text}: numbers have more than {READOUT_CHARACTERS} characters")
    return FloatSlider(
        value=value,
        min=low,
        max=high,
        step=step,
        description=text,
        tooltip=tooltip,
        readout_format=f".{digits}f",
        continuous_update=True,
        # The zero is wider than the average letter, so so many characters fit.
        style={"description_width": f"{LABEL_CHARACTERS}ch"},
        layout=Layout(width="100%"),
    )

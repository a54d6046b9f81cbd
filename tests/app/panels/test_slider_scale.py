"""Places on a slider and values. Truth: a place must come back as itself, and order must be kept."""

from __future__ import annotations

import pytest

from app.panels.slider_scale import SliderScale
from core.operating import OPERATING_FIELDS
from core.parameters import CHANNEL_FIELDS

NUMBERS = [field for field in (*CHANNEL_FIELDS.values(), *OPERATING_FIELDS.values()) if not field.choices]


@pytest.mark.parametrize("field", NUMBERS, ids=lambda field: field.name)
def test_every_place_has_a_value_that_the_field_takes(field):
    scale = SliderScale.of(field)
    values = [scale.value(tick) for tick in range(scale.tick_count + 1)]
    assert values == sorted(values)
    assert (values[0], values[-1]) == (field.minimum, field.maximum)
    for value in values:
        field.checked(value)


@pytest.mark.parametrize("field", NUMBERS, ids=lambda field: field.name)
def test_a_place_comes_back_to_within_one(field):
    scale = SliderScale.of(field)
    for tick in range(scale.tick_count + 1):
        assert abs(scale.tick(scale.value(tick)) - tick) <= 1


@pytest.mark.parametrize("field", NUMBERS, ids=lambda field: field.name)
def test_values_on_the_slider_have_few_digits(field):
    scale = SliderScale.of(field)
    for tick in range(scale.tick_count + 1):
        text = f"{scale.value(tick):.9g}"
        assert len(text.replace(".", "").strip("0")) <= 5, text


def test_wide_ranges_give_small_values_room():
    scale = SliderScale.of(CHANNEL_FIELDS["loop_radius_um"])  # 5 um to 10 mm
    assert scale.tick(320.0) > 0.3 * scale.tick_count, "a common radius must not crowd into the first part"
    angle = SliderScale.of(CHANNEL_FIELDS["loop_angle_deg"])
    assert angle.bend == 0.0, "angles are evenly spread"


def test_values_outside_sit_at_the_ends():
    scale = SliderScale.of(CHANNEL_FIELDS["stages"])
    assert scale.tick(-5) == 0
    assert scale.tick(1e9) == scale.tick_count

"""The door between users' units and the library's plain SI numbers.

Everything that comes in (a number, a string such as ``"3.5 lbf/in"``, a quantity of any pint
registry) passes through a named converter once and is an SI float or array from then on. Nothing
outside this folder knows that pint exists, and pint is imported only when a string has to be read.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from springpoise.lazy import names_of
from springpoise.units.convert import DEGREES_SUSPECTED as DEGREES_SUSPECTED
from springpoise.units.convert import QuantityLike as QuantityLike
from springpoise.units.convert import ScalarLike as ScalarLike
from springpoise.units.convert import acceleration as acceleration
from springpoise.units.convert import acceleration_pair as acceleration_pair
from springpoise.units.convert import ampere as ampere
from springpoise.units.convert import joule as joule
from springpoise.units.convert import kelvin as kelvin
from springpoise.units.convert import kilogram as kilogram
from springpoise.units.convert import kilogram_per_cubic_metre as kilogram_per_cubic_metre
from springpoise.units.convert import metre as metre
from springpoise.units.convert import metre_pair as metre_pair
from springpoise.units.convert import metre_per_second_squared as metre_per_second_squared
from springpoise.units.convert import metre_place as metre_place
from springpoise.units.convert import metre_triple as metre_triple
from springpoise.units.convert import newton as newton
from springpoise.units.convert import newton_metre as newton_metre
from springpoise.units.convert import newton_metre_per_ampere as newton_metre_per_ampere
from springpoise.units.convert import newton_metre_per_radian as newton_metre_per_radian
from springpoise.units.convert import newton_per_metre as newton_per_metre
from springpoise.units.convert import number as number
from springpoise.units.convert import ohm as ohm
from springpoise.units.convert import optional_metre as optional_metre
from springpoise.units.convert import optional_newton as optional_newton
from springpoise.units.convert import optional_radian_pair as optional_radian_pair
from springpoise.units.convert import pair as pair
from springpoise.units.convert import pascal as pascal
from springpoise.units.convert import per_kelvin as per_kelvin
from springpoise.units.convert import poses as poses
from springpoise.units.convert import radian as radian
from springpoise.units.convert import radian_pair as radian_pair
from springpoise.units.convert import radian_per_second as radian_per_second
from springpoise.units.convert import radian_triple as radian_triple
from springpoise.units.convert import radians as radians
from springpoise.units.convert import scalar_si as scalar_si
from springpoise.units.convert import second as second
from springpoise.units.convert import triple as triple
from springpoise.units.fields import are_known as are_known
from springpoise.units.fields import comparable as comparable
from springpoise.units.fields import fraction as fraction
from springpoise.units.fields import named_fields as named_fields
from springpoise.units.fields import not_negative as not_negative
from springpoise.units.fields import not_zero as not_zero
from springpoise.units.fields import positive as positive

if TYPE_CHECKING:
    from springpoise.units.text import parse as parse
    from springpoise.units.text import quantity as quantity
else:  # reading strings is loaded when there is one
    __getattr__ = names_of(__name__, {"parse": "text", "quantity": "text"})

__all__ = ["QuantityLike", "ScalarLike", "parse", "quantity"]

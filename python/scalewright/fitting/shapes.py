"""Shapes that a fit may give to densities at the start: parameters in, x f(x) at the nodes of a grid out.

Which one when: `PowerLaw` for a few tens of parameters with a meaning; `Network` where no form is to be
assumed and there are many replicas; `FunctionShape` for a law of your own. ``shape.restricted`` fixes, ties
and bounds parameters of any of them, and adds what is known of them from elsewhere.
"""

from __future__ import annotations

from ._function_shape import FunctionShape
from ._network import Network
from ._power_law import PowerLaw
from ._shape import Restricted, Shape
from ._terms import Term

__all__ = ["FunctionShape", "Network", "PowerLaw", "Restricted", "Shape", "Term"]

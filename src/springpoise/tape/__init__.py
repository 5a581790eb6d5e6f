"""Record a formula once; differentiate it, and turn it into fast functions.

:func:`record` runs a function on variables and returns a :class:`Program`: a straight-line list
of operations with constants folded and common terms shared. From a program come a plain Python
function for one pose, a blocked NumPy function for many, exact derivatives, and source text.

:class:`Dual` and :func:`derivative_of` differentiate without recording, on floats and arrays.
"""

from __future__ import annotations

from springpoise.tape.dual import Dual, derivative_of
from springpoise.tape.program import Program
from springpoise.tape.recording import record
from springpoise.tape.variables import Variable

__all__ = ["Dual", "Program", "Variable", "derivative_of", "record"]

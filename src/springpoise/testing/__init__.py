"""Checks for springs, paths and linkages of your own: what must be true of any of them.

Each check runs the identities that the library holds its own parts to, over places that you name,
and returns a report of the worst differences; or raises an error that names the identity, the
place and both numbers. They need nothing but the library, and run inside any test.
"""

from __future__ import annotations

from springpoise.testing.checks import check_linkage as check_linkage
from springpoise.testing.checks import check_path as check_path
from springpoise.testing.checks import check_spring as check_spring
from springpoise.testing.identities import Identity as Identity
from springpoise.testing.identities import IdentityError as IdentityError
from springpoise.testing.identities import IdentityReport as IdentityReport

__all__ = ["Identity", "IdentityError", "IdentityReport", "check_linkage", "check_path", "check_spring"]

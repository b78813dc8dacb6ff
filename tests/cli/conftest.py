"""Compiled code is loaded before any test: the command sets numba's limit of threads otherwise."""

from __future__ import annotations

import driftwell.run  # noqa: F401

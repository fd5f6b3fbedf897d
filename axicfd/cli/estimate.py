"""The case in the plain numbers of the hand estimate, and the estimate in words."""

from __future__ import annotations

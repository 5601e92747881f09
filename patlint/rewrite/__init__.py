"""Shorter equivalents: what could be written instead of a pattern, and the proof that it may be."""

from __future__ import annotations

from patlint.rewrite.shorten import Keeps, Proposal, shorten, suggest

__all__ = ["Keeps", "Proposal", "shorten", "suggest"]

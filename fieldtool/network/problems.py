"""What can be wrong with a layout or a question put to it, named for the situation."""

from __future__ import annotations

__all__ = ["BadRun", "Disconnected", "NetworkProblem", "NoSuchNode"]


class NetworkProblem(ValueError):
    """A layout that cannot be solved, or a place that it does not have."""


class BadRun(NetworkProblem):
    """A run with a resistance that no conductor has: below zero, or not a number."""


class NoSuchNode(NetworkProblem):
    """A place that the layout does not have."""


class Disconnected(NetworkProblem):
    """A place that no conductor reaches from the board."""

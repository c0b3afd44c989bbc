"""The way from the supply to a node: what the voltage strip draws and what a route length adds up."""

from app.study.outcome import Outcome


def path(outcome: Outcome, node_id: str) -> tuple[str, ...]:
    """The branches from the supply to a node, in the order the power flows.

    outcome : of a run
    node_id : id of a node

    Returns : tuple of branch ids; empty at the supply itself and in dead parts
    """
    found = []
    while node_id in outcome.upstream:
        found.append(outcome.upstream[node_id])
        node_id = outcome.fed_from[node_id]
    return tuple(reversed(found))

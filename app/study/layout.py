"""The drawing as a graph: which supply feeds what, through which branch, in which voltage zone."""

from collections.abc import Mapping
from dataclasses import replace
from typing import Any

from app.model.drawing import Drawing
from app.model.kinds import Attachment, Branch, Element, Node, Supply, Transformer
from app.study.graph import NONE, Arrays, Layout, Ring, arrays_of, is_bare
from app.study.trace import trace

__all__ = ["NONE", "Arrays", "Layout", "Ring", "arrays_of", "is_bare", "lay_out"]

Elements = Mapping[str, Element]
_last: tuple[Elements, Layout] | None = None


def lay_out(drawing: Drawing) -> Layout:
    """Sort the drawing into rows and trace it from its supplies.

    Where nothing that bears on the graph has changed since the last call, the graph is taken over.

    drawing : the drawing

    Returns : Layout
    """
    global _last
    last, elements = _last, drawing.elements
    moved = None if last is None else _moved(last[0], elements)
    if last is not None and moved is not None:
        layout = _with(last[1], {id: elements[id] for id in moved})
    else:
        layout = _sorted(elements)
        trace(layout)
    _last = (elements, layout)
    return layout


def _moved(old: Elements, new: Elements) -> list[str] | None:
    """The ids whose elements are not the same; None where their graphs differ."""
    if list(old) != list(new):
        return None
    both = zip(new, old.values(), new.values(), strict=True)
    moved = [id for id, was, now in both if was is not now]
    return moved if all(_joins(old[id]) == _joins(new[id]) for id in moved) else None


def _with(layout: Layout, moved: Elements) -> Layout:
    """The same graph with other elements."""
    nodes, branches, attachments = list(layout.nodes), list(layout.branches), list(layout.attachments)
    for id, element in moved.items():
        if isinstance(element, Node):
            nodes[layout.node_row[id]] = element
        elif isinstance(element, Branch):
            branches[layout.branch_row[id]] = element
        elif isinstance(element, Attachment):
            attachments[layout.attachment_row[id]] = element
    return replace(layout, nodes=nodes, branches=branches, attachments=attachments)


def _joins(element: Element) -> tuple[object, ...]:
    """All of an element that bears on the graph."""
    if isinstance(element, Branch):
        return type(element), element.start, element.end, getattr(element, "closed", True)
    return type(element), getattr(element, "node", "")


_GROUPS: dict[type[Element], int] = {}


def _group(kind: type[Element]) -> int:
    found = _GROUPS.get(kind)
    if found is None:
        found = _GROUPS[kind] = 0 if issubclass(kind, Node) else 1 if issubclass(kind, Branch) else 2
    return found


def _elements(elements: Elements) -> tuple[list[Any], list[Any], list[Any]]:
    """Nodes, branches, attachments."""
    groups: tuple[list[Any], ...] = ([], [], [])
    for element in elements.values():
        groups[_group(type(element))].append(element)
    return groups[0], groups[1], groups[2]


def _sorted(elements: Elements) -> Layout:
    nodes, branches, attachments = _elements(elements)
    ids: tuple[list[str], ...] = ([], [], [])
    for id, element in elements.items():
        ids[_group(type(element))].append(id)
    row = {id: i for i, id in enumerate(ids[0])}
    return Layout(
        node_ids=ids[0],
        nodes=nodes,
        branch_ids=ids[1],
        branches=branches,
        attachment_ids=ids[2],
        attachments=attachments,
        node_row=row,
        branch_row={id: i for i, id in enumerate(ids[1])},
        attachment_row={id: i for i, id in enumerate(ids[2])},
        start=[row[b.start] for b in branches],
        end=[row[b.end] for b in branches],
        at=[row[a.node] for a in attachments],
        supplies=[i for i, a in enumerate(attachments) if isinstance(a, Supply)],
        units=[i for i, b in enumerate(branches) if isinstance(b, Transformer)],
    )

"""Parts of a page, as Dash components: each of them, their words, what they carry."""

from dash.development.base_component import Component


def nodes(tree, kind=None):
    """Every component of a tree in the order of the page, or those of one kind."""
    if isinstance(tree, list | tuple):
        return [node for each in tree for node in nodes(each, kind)]
    if not isinstance(tree, Component):
        return []
    own = [tree] if kind in (None, type(tree).__name__) else []
    return own + nodes(getattr(tree, "children", None), kind)


def words(tree):
    """The words of a tree, joined by spaces."""
    if isinstance(tree, list | tuple):
        return " ".join(filter(None, map(words, tree)))
    if isinstance(tree, Component):
        return words(getattr(tree, "children", None))
    return "" if tree is None else str(tree)


def props(tree):
    """What every component of a tree carries."""
    return [node.to_plotly_json()["props"] for node in nodes(tree)]

"""What the browser asks of a server, and how to find a part of what it is answered."""

PAGE = {
    "output": "..page.children...page-title.children..",
    "outputs": [
        {"id": "page", "property": "children"},
        {"id": "page-title", "property": "children"},
    ],
}
# 60 months of two series that grow: a file that every reader takes.
GOOD = b"month,Money,Prices\n" + b"".join(
    b"%d-%02d,%d,%d\n" % (2000 + i // 12, i % 12 + 1, 100 + i, 200 + i * i) for i in range(60)
)


def opened(client, path, query=""):
    """The page for an address, as the browser asks for it."""
    return client.post(
        "/_dash-update-component",
        json={
            **PAGE,
            "inputs": [
                {"id": "address", "property": "pathname", "value": path},
                {"id": "address", "property": "search", "value": query},
            ],
            "changedPropIds": ["address.pathname", "address.search"],
        },
    )


def stored(answer, name):
    """What a dcc.Store of an opened page holds."""
    found = []

    def walk(node):
        if isinstance(node, dict):
            if node.get("id") == name:
                found.append(node["data"])
            for child in node.values():
                walk(child)
        elif isinstance(node, list):
            for child in node:
                walk(child)

    walk(answer.json)
    return found[0]

"""The list of keys that "?" shows on every page; assets/keys.js opens it."""

from dash import html

KEYS = {
    "On every page, outside a text field": (
        ("?", "this list"),
        ("Esc", "close this list or a sentence of help"),
    ),
    "On a slider": (
        ("← →", "one step"),
        ("Page Up, Page Down", "ten steps"),
        ("Home, End", "its ends"),
    ),
    "Lag: on the map": (
        ("← →", "shift by one"),
        ("↑ ↓", "window by one"),
        ("Shift + ← →", "shift by a year"),
        ("Page Up, Page Down", "window by a year"),
        ("Home, End", "least and largest shift"),
        ("Ctrl + Home, Ctrl + End", "least and largest window"),
    ),
    "Lag: anywhere outside a text field": (
        ("Space", "play or pause, while the player is open"),
        ("Ctrl + Z", "back to the state before"),
        ("Ctrl + Shift + Z", "forward again"),
        ("P", "pin the chosen cell"),
        ("Esc", "stop the player, or drop the months chosen"),
    ),
}


def key_list() -> html.Dialog:
    """Return the list, closed."""
    return html.Dialog(
        [
            html.H2("Keys", id="keys-title"),
            *[
                html.Div(
                    [
                        html.H3(where),
                        html.Dl(
                            [
                                html.Div([html.Dt(html.Kbd(keys)), html.Dd(does)])
                                for keys, does in rows
                            ]
                        ),
                    ]
                )
                for where, rows in KEYS.items()
            ],
            html.Button("Close", id="close-keys", type="button"),
        ],
        id="keys",
        className="keys",
        **{"aria-labelledby": "keys-title"},
    )

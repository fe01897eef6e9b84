"""Scripts and styles as a browser likes them: kept for good once it has them, sent compressed.

Their addresses carry a stamp of their version, so what a browser has kept is never old.
"""

import gzip
import re

from flask import Flask, Response, request

FOR_GOOD = "public, max-age=31536000, immutable"
_STAMPED = re.compile(r"\.v[0-9_]+m[0-9]+\.")  # how Dash stamps the scripts of its components


def register(server: Flask) -> None:
    """Compress the scripts and styles of a server, once each, and let browsers keep them."""
    kept: dict[str, tuple[str, bytes]] = {}  # path -> stamp, compressed

    @server.after_request
    def _serve(response: Response) -> Response:
        if request.method != "GET" or response.status_code != 200 or not _is_file():
            return response
        stamped = "m" in request.args or _STAMPED.search(request.path) is not None
        if stamped:
            response.headers["Cache-Control"] = FOR_GOOD
        if response.mimetype not in ("text/javascript", "application/javascript", "text/css"):
            return response
        response.headers["Vary"] = "Accept-Encoding"
        if "gzip" not in request.headers.get("Accept-Encoding", "") or not stamped:
            return response
        stamp, packed = kept.get(request.path, ("", b""))
        if stamp != request.full_path:
            response.direct_passthrough = False
            packed = gzip.compress(response.get_data(), 6, mtime=0)
            kept[request.path] = request.full_path, packed
        close = getattr(response.response, "close", None)
        response.set_data(packed)
        if close is not None:
            close()  # the file
        response.headers["Content-Encoding"] = "gzip"
        response.headers["Content-Length"] = str(len(packed))
        return response


def _is_file() -> bool:
    return request.path.startswith(("/assets/", "/_dash-component-suites/"))

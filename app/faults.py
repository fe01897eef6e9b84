"""What is answered when something is wrong: one sentence, never the inside of the program."""

from html import escape
from typing import Any

from flask import Flask, Response, request
from werkzeug.exceptions import HTTPException, RequestEntityTooLarge

from app.guard import MAX_WORDS
from app.intake.csv_files import MAX_BYTES

SENTENCES = {
    400: "this request could not be understood",
    401: "this address needs its token: open the address that Pricewake printed when it started",
    403: "this request came from another site's page, which Pricewake does not serve",
    404: "there is nothing at this address",
    405: "this address cannot be used in this way",
    415: "this kind of content is not taken here",
    421: "Pricewake answers only under the name that it printed when it started",
    500: "something went wrong inside the program; the page is still there",
}
PAGE = """<!DOCTYPE html>
<html lang="en"><head><meta charset="utf-8"><title>{code} Pricewake</title>
<meta name="viewport" content="width=device-width, initial-scale=1">
<style>:root {{ color-scheme: light dark; }}
body {{ font: 1rem/1.5 system-ui, sans-serif; max-width: 36rem; margin: 4rem auto; }}
main {{ padding: 0 1rem; }}
h1 {{ font: 400 1.75rem/1.25 Georgia, serif; }}</style></head>
<body><main><h1>Pricewake shows nothing here</h1><p>{words}</p></main></body></html>
"""


def register(server: Flask) -> None:
    """Register the answers to refusals and accidents: a page for a person, JSON for a script."""

    @server.errorhandler(Exception)
    def _failed(error: Exception) -> Response | tuple[dict[str, Any], int]:
        code = error.code if isinstance(error, HTTPException) and error.code else 500
        if isinstance(error, HTTPException) and error.response is not None:
            return error.response  # type: ignore[return-value]
        if not isinstance(error, HTTPException):
            server.logger.exception("unexpected")
        words = _words(error, code)
        if request.method == "GET" and "text/html" in request.headers.get("Accept", ""):
            sentence = escape(f"{words[0].upper()}{words[1:]}.")
            return Response(PAGE.format(code=code, words=sentence), code, mimetype="text/html")
        return {"message": words}, code


def _words(error: Exception, code: int) -> str:
    if isinstance(error, RequestEntityTooLarge):
        if request.path == "/intake":
            limit = MAX_BYTES // 2**20
            return f"a file must be at most {limit} MB, but this one is larger"
        return f"a request must be at most {MAX_WORDS // 2**20} MB, but this one is larger"
    return SENTENCES.get(code, SENTENCES[400] if code < 500 else SENTENCES[500])

"""In which media type and language an answer is given (RFC 9110, section 12), and whether it need be sent again."""

from collections.abc import Sequence
from functools import lru_cache
from typing import Any

from fastapi import Request, Response
from werkzeug.datastructures import LanguageAccept, MIMEAccept
from werkzeug.http import parse_accept_header

from faultloop.api.problems import Refused
from faultloop.assessment.texts import LANGUAGES
from faultloop.digests import sha256

SVG = "image/svg+xml"
ASKED_LANGUAGE: dict[str, Any] = {
    "parameters": [
        {
            "name": "Accept-Language",
            "in": "header",
            "required": False,
            "description": f"Language of the words: {', '.join(LANGUAGES)}; any other gives {LANGUAGES[0]}",
            "schema": {"type": "string"},
        }
    ]
}


def media_type(request: Request, offers: Sequence[str]) -> str:
    """The offer that the client likes best, the first where it does not say; none that it takes is refused."""
    asked = ", ".join(request.headers.getlist("accept"))
    if not asked.strip():
        return offers[0]
    # Whatever is offered is UTF-8, so a client that names the charset gets it too.
    known = {f"{offer}{charset}": offer for charset in ("", ";charset=utf-8") for offer in offers}
    best = parse_accept_header(asked, MIMEAccept).best_match(list(known))
    if best is None:
        raise Refused("not-acceptable", f"Given here: {', '.join(offers)}.")
    return known[best]


def language(request: Request) -> str:
    """The language that the client likes best among those held; a region counts as its language."""
    asked = request.headers.getlist("accept-language")
    return _language(", ".join(asked)) if asked else LANGUAGES[0]


@lru_cache(maxsize=64)
def _language(asked: str) -> str:
    ranges = [(tag.lower().split("-")[0], quality) for tag, quality in parse_accept_header(asked, LanguageAccept)]

    def rank(offer: str) -> tuple[float, int]:
        places = {name: [(q, -at) for at, (tag, q) in enumerate(ranges) if tag == name] for name in (offer, "*")}
        return max(places[offer] or places["*"] or [(0.0, 0)])

    best = max(LANGUAGES, key=rank)
    return best if rank(best)[0] > 0 else LANGUAGES[0]


def tagged(request: Request, body: bytes, kind: str, headers: dict[str, str]) -> Response:
    """An answer with the digest of its bytes as its tag, or 304 where the client holds these bytes."""
    answer = Response(body, media_type=kind, headers={**headers, "ETag": f'"{sha256(body)}"'})
    return unless_held(answer, request.headers.get("if-none-match"))


def unless_held(answer: Response, if_none_match: str | None) -> Response:
    """The answer, or 304 with its headers where the client named its tag."""
    wanted = {tag.strip().removeprefix("W/") for tag in (if_none_match or "").split(",")}
    if answer.headers["ETag"] not in wanted and "*" not in wanted:
        return answer
    kept = ("ETag", "Vary", "Cache-Control", "Content-Language")
    return Response(status_code=304, headers={name: answer.headers[name] for name in kept if name in answer.headers})


def drawing(request: Request, body: bytes, headers: dict[str, str]) -> Response:
    """An SVG, which loads and runs nothing wherever it is opened."""
    still = {"Content-Security-Policy": "default-src 'none'", "X-Content-Type-Options": "nosniff"}
    return tagged(request, body, SVG, {**headers, **still})

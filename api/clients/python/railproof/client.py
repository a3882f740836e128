"""The client: requests and answers over HTTP."""

import json
import time
import urllib.error
import urllib.parse
import urllib.request
from typing import Any, Dict, Mapping, Optional, Tuple, cast

from .contract import PATHS, Job, Operations, Problem
from .job import RunningJob
from .problem import ProblemError
from .shown import Page, Picture

JSON = "application/json"
PICTURES = {"svg": "image/svg+xml", "png": "image/png"}


class NoAnswerError(Exception):
    """What came back was no answer of this service, or nothing came back."""


class Client(Operations):
    """Talks to one server.

    base_url: where the server is
    key: sent as a bearer token, where the server asks for one
    timeout_s: for one request
    patience: how often a request is sent again that found the server busy (429, 503)
    """

    def __init__(self, base_url: str = "http://127.0.0.1:8080", key: Optional[str] = None, timeout_s: float = 60.0, patience: int = 3) -> None:
        self.base_url = base_url.rstrip("/")
        self.timeout_s = timeout_s
        self.patience = patience
        self._key = key

    def picture(self, operation: str, request: Mapping[str, Any], form: str = "svg", **query: Any) -> Picture:
        """The answer of an operation as a picture; form is "svg" or "png", query what the contract offers, such as picture="..."."""
        body, kind = self._send(operation, accept=PICTURES[form], query=query, request=request)
        return Picture(body, kind)

    def table(self, operation: str, request: Mapping[str, Any], **query: Any) -> str:
        """The answer of an operation as comma-separated values."""
        body, _ = self._send(operation, accept="text/csv", query=query, request=request)
        return body.decode()

    def report(self, request: Mapping[str, Any]) -> Page:
        """One document that proves a rail."""
        body, _ = self._send("reports", accept="text/html", request=request)
        return Page(body.decode())

    def submit(self, operation: str, request: Mapping[str, Any]) -> RunningJob:
        """Hands long work over as a job."""
        body, _ = self._send(operation, request=request, prefer="respond-async")
        value = json.loads(body)
        if "state" not in value:
            raise NoAnswerError("the server answered at once: it has no jobs")
        return RunningJob(self, cast(Job, value))

    def result(self, result_id: str) -> Any:
        """A stored result: the JSON value that was answered."""
        return self._json("getResult", {"id": result_id}, {}, None)

    def example(self, rail: str, operation: str) -> Any:
        """A complete example request, such as example("buoy-5v0", "losses")."""
        name = PATHS[_camel(operation)][1].rsplit("/", 1)[-1]
        body, _ = self._exchange("GET", f"/examples/{rail}/{name}.json", {"Accept": JSON}, None)
        return json.loads(body)

    def _json(self, operation: str, in_path: Mapping[str, str], query: Mapping[str, Any], request: Optional[Mapping[str, Any]]) -> Any:
        body, _ = self._send(operation, in_path=in_path, query=query, request=request)
        return json.loads(body)

    def _send(self, operation: str, *, accept: str = JSON, in_path: Optional[Mapping[str, str]] = None, query: Optional[Mapping[str, Any]] = None,
              request: Optional[Mapping[str, Any]] = None, prefer: Optional[str] = None) -> Tuple[bytes, str]:
        method, path = PATHS[_camel(operation)]
        for name, value in (in_path or {}).items():
            path = path.replace("{" + name + "}", urllib.parse.quote(value, safe=""))
        asked = {n: ("true" if v is True else "false" if v is False else str(v)) for n, v in (query or {}).items() if v is not None}
        if asked:
            path += "?" + urllib.parse.urlencode(asked)
        headers = {"Accept": accept}
        body = None
        if request is not None:
            headers["Content-Type"] = JSON
            body = json.dumps(request, allow_nan=False).encode()
        if prefer:
            headers["Prefer"] = prefer
        return self._exchange(method, path, headers, body)

    def _exchange(self, method: str, path: str, headers: Dict[str, str], body: Optional[bytes]) -> Tuple[bytes, str]:
        if self._key:
            headers["Authorization"] = "Bearer " + self._key
        message = urllib.request.Request(self.base_url + path, data=body, headers=headers, method=method)
        for attempt in range(self.patience + 1):
            try:
                with urllib.request.urlopen(message, timeout=self.timeout_s) as answer:
                    return answer.read(), answer.headers.get_content_type()
            except urllib.error.HTTPError as refused:
                with refused:
                    problem = _problem(refused)
                    again = refused.headers.get("Retry-After", "")
                if refused.code not in (429, 503) or attempt == self.patience or not again.isdigit():
                    raise problem from None
                time.sleep(int(again))
            except urllib.error.URLError as lost:
                raise NoAnswerError(f"{self.base_url}: {lost.reason}") from lost
        raise AssertionError("the last attempt returns or raises")


def _problem(refused: urllib.error.HTTPError) -> Exception:
    if refused.headers.get_content_type() != "application/problem+json":
        return NoAnswerError(f"{refused.url}: status {refused.code} without a problem document")
    return ProblemError(cast(Problem, json.loads(refused.read())))


def _camel(operation: str) -> str:
    """Operations may be named as methods are: steady_state or steadyState."""
    head, *rest = operation.split("_")
    name = head + "".join(part.capitalize() for part in rest)
    if name not in PATHS:
        raise ValueError(f"no operation {operation!r}; there are {', '.join(PATHS)}")
    return name

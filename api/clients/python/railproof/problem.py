"""Refusals of the server as exceptions."""

from typing import List

from .contract import Fault, Problem


class ProblemError(Exception):
    """A problem document (RFC 9457): what was wrong, and at which places of the request."""

    def __init__(self, problem: Problem) -> None:
        self.type: str = problem["type"]
        self.title: str = problem["title"]
        self.status: int = problem["status"]
        self.detail: str = problem.get("detail", "")
        self.instance: str = problem.get("instance", "")
        self.faults: List[Fault] = problem.get("errors", [])
        super().__init__(self._text())

    @property
    def kind(self) -> str:
        """The last part of type, such as "schema" or "physics"."""
        return self.type.rstrip("/").rsplit("/", 1)[-1]

    @property
    def pointers(self) -> List[str]:
        """The JSON Pointers (RFC 6901) of all faults."""
        return [f["pointer"] for f in self.faults]

    def _text(self) -> str:
        lines = [f"{self.title} ({self.status})"]
        if not self.faults:
            lines.append(self.detail)
        for f in self.faults:
            line = f"{f['pointer'] or 'the document'}: {f['detail']}"
            if received := f.get("received"):
                line += f"; given {received}"
            if limit := f.get("limit"):
                line += f"; accepted: {limit}"
            if unit := f.get("unit"):
                line += f" [{unit}]"
            lines.append(line)
        return "\n  ".join(line for line in lines if line)

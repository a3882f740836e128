"""Writes railproof/contract.py from the contract: one class per schema, one method per operation."""

import json
import keyword
import re
import sys
from typing import Any

HEAD = '''"""Types and operations of the contract. Written by api/clients/generate; not edited by hand."""

from abc import ABC, abstractmethod
from typing import Any, Dict, List, Literal, Mapping, NotRequired, Optional, TypedDict, Union, cast

CONTRACT_VERSION = {version!r}
'''


def expression(schema: dict[str, Any]) -> str:
    """The Python type of a schema."""
    if "$ref" in schema:
        return repr(schema["$ref"].rsplit("/", 1)[1])
    if "oneOf" in schema:
        return f"Union[{', '.join(expression(s) for s in schema['oneOf'])}]"
    if "enum" in schema:
        return f"Literal[{', '.join(repr(v) for v in schema['enum'])}]"
    kind = schema.get("type")
    if kind == "array":
        return f"List[{expression(schema.get('items', {}))}]"
    if kind == "object" and isinstance(schema.get("additionalProperties"), dict):
        return f"Dict[str, {expression(schema['additionalProperties'])}]"
    simple = {"number": "float", "integer": "int", "boolean": "bool", "string": "str", "object": "Dict[str, Any]"}
    return simple.get(kind or "", "Any")


def comment(schema: dict[str, Any]) -> str:
    """Unit and meaning of a field, on one line."""
    unit = schema.get("x-unit")
    text = " ".join(schema.get("description", "").split())
    parts = ([f"[{unit}]"] if unit else []) + ([text] if text else [])
    return "  # " + " ".join(parts) if parts else ""


def definition(name: str, schema: dict[str, Any]) -> list[str]:
    """The class of a schema, or its alias."""
    properties: dict[str, Any] = schema.get("properties", {})
    if not properties:
        return [f"{name} = {expression(schema)}"]
    required = set(schema.get("required", []))

    def kind(field: str) -> str:
        inner = expression(properties[field])
        return inner if field in required else f"NotRequired[{inner}]"

    if any(keyword.iskeyword(f) or not f.isidentifier() for f in properties):
        return [f"{name} = TypedDict({name!r}, {{"] + [f"    {f!r}: {kind(f)},{comment(properties[f])}" for f in properties] + ["})"]
    lines = [f"class {name}(TypedDict):"]
    if text := " ".join(schema.get("description", "").split()):
        lines.append(f'    """{text}"""'.replace("\\", "\\\\"))
        lines.append("")
    return lines + [f"    {f}: {kind(f)}{comment(properties[f])}" for f in properties]


def snake(name: str) -> str:
    return re.sub(r"(?<=[a-z0-9])(?=[A-Z])", "_", name).lower()


def method(path: str, verb: str, operation: dict[str, Any], document: dict[str, Any]) -> list[str]:
    """The method of an operation that answers JSON."""
    answer = expression(operation["responses"]["200"]["content"]["application/json"]["schema"]).strip("'")
    parameters = []
    for p in operation.get("parameters", []):
        if "$ref" in p:
            p = document["components"]["parameters"][p["$ref"].rsplit("/", 1)[1]]
        parameters.append(p)
    in_path = [p for p in parameters if p["in"] == "path"]
    query = [p for p in parameters if p["in"] == "query" and p["name"] not in ("picture", "quantity", "item", "width_px", "timings")]
    arguments = ["self"] + [f"{p['name']}: str" for p in in_path]
    if "requestBody" in operation:
        body = expression(operation["requestBody"]["content"]["application/json"]["schema"]).strip("'")
        arguments.append(f"request: {body}")
    if query:
        arguments += ["*"] + [f"{p['name']}: Optional[{expression(p['schema'])}] = None" for p in query]
    given = "{" + ", ".join("%r: %s" % (p["name"], p["name"]) for p in in_path) + "}"
    asked = "{" + ", ".join("%r: %s" % (p["name"], p["name"]) for p in query) + "}"
    request = "cast(Mapping[str, Any], request)" if "requestBody" in operation else "None"
    return [
        f"    def {snake(operation['operationId'])}({', '.join(arguments)}) -> {answer}:",
        f'        """{operation["summary"].rstrip("?")}{"?" if operation["summary"].endswith("?") else "."}"""',
        f"        return cast({answer}, self._json({operation['operationId']!r}, {given}, {asked}, {request}))",
        "",
    ]


def main() -> None:
    with open(sys.argv[1], encoding="utf-8") as file:
        document = json.load(file)
    lines = [HEAD.format(version=document["info"]["version"])]
    for name, schema in document["components"]["schemas"].items():
        lines += ["", *definition(name, schema), ""]
    table = ["", "PATHS: Dict[str, tuple[str, str]] = {"]
    methods = ["", "class Operations(ABC):", '    """The operations that answer JSON, each typed as the contract has it."""', "",
               "    @abstractmethod", "    def _json(self, operation: str, in_path: Mapping[str, str], query: Mapping[str, Any], request: Optional[Mapping[str, Any]]) -> Any:",
               '        """Sends a request and returns the JSON value of the answer."""', ""]
    for path, item in document["paths"].items():
        if not path.startswith("/v1/"):
            continue
        for verb in ("get", "post", "delete"):
            operation = item.get(verb)
            if not operation:
                continue
            table.append(f"    {operation['operationId']!r}: ({verb.upper()!r}, {path!r}),")
            if operation["responses"]["200"].get("content", {}).get("application/json", {}).get("schema"):
                methods += method(path, verb, operation, document)
    lines += table + ["}", ""] + methods
    sys.stdout.write(re.sub(r"\n{4,}", "\n\n\n", "\n".join(lines)).rstrip() + "\n")


main()

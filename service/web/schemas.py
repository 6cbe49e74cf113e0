"""JSON Schemas that belong to every address: the problem document and a name.

Left out: schemas of single requests and answers, which come from their models.
"""

from typing import Any

from service.problems import KINDS, MOST_DETAILS

TEXT: dict[str, Any] = {"type": "string"}
BYTES: dict[str, Any] = {"type": "string", "format": "binary"}

NAME: dict[str, Any] = {
    "type": "string",
    "pattern": "^[a-z0-9][a-z0-9-]{0,47}$",
}

PROBLEM: dict[str, Any] = {
    "type": "object",
    "description": "A refusal as RFC 9457 has it, with a code, its number and every place.",
    "required": [
        "type",
        "title",
        "status",
        "detail",
        "code",
        "number",
        "errors",
        "request_id",
    ],
    "properties": {
        "type": {"type": "string", "format": "uri-reference"},
        "title": {"type": "string"},
        "status": {"type": "integer"},
        "detail": {"type": "string"},
        "code": {"type": "string", "enum": sorted(KINDS)},
        "number": {"type": "integer", "enum": sorted({kind.number for kind in KINDS.values()})},
        "errors": {
            "type": "array",
            "maxItems": MOST_DETAILS,
            "items": {
                "type": "object",
                "required": ["pointer", "in", "say", "value", "way_out"],
                "properties": {
                    "pointer": {"type": "string", "description": "JSON Pointer (RFC 6901)"},
                    "in": {"type": "string", "enum": ["body", "query", "path", "header"]},
                    "say": {"type": "string"},
                    "value": {"description": "the offending value, cut to 200 characters"},
                    "way_out": {"type": "string"},
                },
            },
        },
        "request_id": {"type": "string"},
    },
}

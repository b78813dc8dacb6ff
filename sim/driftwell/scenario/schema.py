"""JSON Schema of scenario and study files, for editors: from the declarations readers use."""

from __future__ import annotations

from dataclasses import dataclass
from dataclasses import field as dataclass_field
from typing import Any

from driftwell.forms import Bound, Form
from driftwell.forms.declared import (
    Anything,
    Choice,
    Declared,
    DeclaredKey,
    Dimensioned,
    Flag,
    Keys,
    Named,
    Number,
    Row,
    Several,
    Text,
    Words,
    about,
    declared_keys,
)
from driftwell.forms.wording import bound_words, raw_value
from driftwell.scenario.model import Scenario

_QUANTITY = r"^\s*[+SIGN]?((\d+\.?\d*|\.\d+)([eE][+-]?\d+)?\s*[A-Za-zµμΩ°%Å1].*|0+\.?0*|\.0+)\s*$"
_LINE = r"^[^\u0000-\u001f\u007f]+$"


@dataclass(slots=True)
class _Definitions:
    """Schemas of all forms met so far, each under a name of its own."""

    schemas: dict[str, Any] = dataclass_field(default_factory=dict)
    names: dict[type[Form], str] = dataclass_field(default_factory=dict)

    def new_name(self, form: type[Form]) -> str:
        """A name in plain letters: the folder of the form's module, and its class."""
        words = f"{form.__module__.split('.')[-2]} {form.__name__}"
        plain = "-".join("".join(c if c.isalnum() else " " for c in words).split()).lower()
        taken = set(self.names.values())
        name = next(n for n in (plain, *(f"{plain}-{i}" for i in range(2, 99))) if n not in taken)
        self.names[form] = name
        return name


def json_schema(form: type[Form] = Scenario, title: str = "driftwell scenario") -> dict[str, Any]:
    """The schema, draft 2020-12, of the table that a file of such a form holds."""
    definitions = _Definitions()
    root = _table(form, definitions)
    return {
        "$schema": "https://json-schema.org/draft/2020-12/schema",
        "title": title,
        **root,
        "$defs": dict(sorted(definitions.schemas.items())),
    }


def _table(form: type[Form], definitions: _Definitions) -> dict[str, Any]:
    keys = declared_keys(form)
    schema: dict[str, Any] = {
        "type": "object",
        "description": about(form)[0],
        "properties": {name: _key(key, definitions) for name, key in keys.items()},
        "additionalProperties": False,
    }
    required = [name for name, key in keys.items() if key.required]
    return schema | ({"required": required} if required else {})


def _key(key: DeclaredKey, definitions: _Definitions) -> dict[str, Any]:
    schema = _value(key.holds, definitions)
    if key.help:
        schema["description"] = _sentences(key.help, schema.get("description"))
    if not key.required and key.default is not None and not _is_empty(key.default):
        default = raw_value(key.holds, key.default)
        if not isinstance(default, dict):
            schema["default"] = default
    if key.example is not None:
        schema["examples"] = [key.example]
    return schema


def _sentences(help_text: str, more: str | None) -> str:
    return help_text if not more else f"{help_text} ({more})"


def _is_empty(default: Any) -> bool:
    return isinstance(default, tuple | dict) and not default


def _value(declared: Declared, definitions: _Definitions) -> dict[str, Any]:
    match declared:
        case Dimensioned(name, si_unit, example, bounds):
            return _quantity(name, example, bounds) | _words(bounds, si_unit)
        case Number(whole, bounds):
            return {"type": "integer" if whole else "number", **_limits(bounds)}
        case Text(least, most):
            schema = {"type": "string", "minLength": least}
            return schema if most is None else schema | {"maxLength": most, "pattern": _LINE}
        case Flag():
            return {"type": "boolean"}
        case Anything():
            return {}
        case Words(words):
            return {"const": words[0]} if len(words) == 1 else {"enum": list(words)}
        case Row(entries):
            items = [_value(entry, definitions) for entry in entries]
            return {"type": "array", "prefixItems": items, "items": False, "minItems": len(items)}
        case Several(entry):
            return {"type": "array", "items": _value(entry, definitions)}
        case Named(entry):
            return {"type": "object", "additionalProperties": _value(entry, definitions)}
        case Keys(form):
            return _reference(form, definitions)
        case Choice():
            return _choice(declared, definitions)


def _choice(choice: Choice, definitions: _Definitions) -> dict[str, Any]:
    options = [_value(option, definitions) for _, option in choice.options]
    if len(choice.kinds) < len(options):
        return {"anyOf": options}
    # said at the entry too: editors then offer the kinds before one is chosen
    kinds = {"enum": [name for name, _ in choice.kinds]}
    return {
        "type": "object",
        "required": [choice.by],
        "properties": {choice.by: kinds},
        "oneOf": options,
    }


def _reference(form: type[Form], definitions: _Definitions) -> dict[str, Any]:
    name = definitions.names.get(form)
    if name is None:
        name = definitions.new_name(form)
        definitions.schemas[name] = _table(form, definitions)
    return {"$ref": f"#/$defs/{name}"}


def _quantity(name: str, example: str, bounds: tuple[Bound, ...]) -> dict[str, Any]:
    never_negative = any(0.0 in (bound.above, bound.least) for bound in bounds)
    pattern = _QUANTITY.replace("SIGN", "" if never_negative else "-")
    return {"type": "string", "title": name, "pattern": pattern, "examples": [example]}


def _limits(bounds: tuple[Bound, ...]) -> dict[str, Any]:
    limits: dict[str, Any] = {}
    for bound in bounds:
        named = {
            "exclusiveMinimum": bound.above,
            "minimum": bound.least,
            "exclusiveMaximum": bound.below,
            "maximum": bound.most,
        }
        limits |= {name: limit for name, limit in named.items() if limit is not None}
        if bound.other_than is not None:
            limits["not"] = {"const": bound.other_than}
    return limits


def _words(bounds: tuple[Bound, ...], si_unit: str) -> dict[str, Any]:
    return {"description": bound_words(bounds, si_unit)} if bounds else {}

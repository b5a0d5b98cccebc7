"""Objects of a scenario: reading, writing and copying driven by their declared fields."""

from collections.abc import Iterator, Mapping
from typing import Any, ClassVar, Self

import param

from explorer.scenario.errors import ScenarioError, join, shown
from explorer.scenario.fields import Field, Text, Value, check_keys, list_fault, object_fault, text_fault
from explorer.scenario.quantity import ordered

OPTIONAL, REQUIRED = "optional", "required"

# Param keeps the parameter "name" to itself and lets nobody declare it with another class.
_NAMES = {
    OPTIONAL: Text("", label="Name", doc="Name shown everywhere."),
    REQUIRED: Text(None, required=True, label="Name", doc="Name shown everywhere."),
}


class Entity(param.Parameterized):
    """Something with declared fields and a JSON form.

    ``constants`` are parts of the JSON form that say what it is (the kind of a step, the file format).
    An entity remembers which parts its source wrote out, and in which order, so that a file that is opened
    and saved again stays the same.
    """

    constants: ClassVar[Mapping[str, Any]] = {}
    name = param.String("", constant=False, doc="Name shown everywhere.")
    named: ClassVar[str] = ""
    """Whether there is a ``name``: OPTIONAL, REQUIRED or "" for none."""

    def __init__(self, **values: Any) -> None:
        self._written: tuple[str, ...] = ()
        super().__init__(**({"name": ""} | values))

    @classmethod
    def fields(cls) -> dict[str, Field]:
        """Declared fields by name, in the order of declaration."""
        if "_fields" not in cls.__dict__:
            declared = dict.fromkeys(name for base in reversed(cls.__mro__) for name in vars(base))
            parameters = cls.param.objects("existing")
            found = {name: parameters[name] for name in declared if isinstance(parameters.get(name), Field)}
            name = {"name": _NAMES[cls.named]} if cls.named else {}
            cls._fields = {key: found[key] for key in ("id",) if key in found} | name | found
        return cls._fields

    @classmethod
    def from_dict(cls, raw: Any, path: str = "") -> Self:
        """Object from its JSON form; ``path`` is where that stands. Raises ScenarioError."""
        fault = object_fault(raw)
        if fault:
            raise ScenarioError(path, fault)
        fields = cls.fields()
        check_keys(raw, (*cls.constants, *fields), path)
        entity = cls(**dict(read_fields(fields, raw, path)))
        entity._written = tuple(raw)
        return entity

    def to_dict(self) -> dict[str, Any]:
        """JSON form: what the source wrote out, in its order, and whatever differs from the default."""
        parts = {"id": None} if "id" in self.fields() else {}
        parts |= self.constants
        for key, field in self.fields().items():
            value = getattr(self, key)
            if key in self._written or field.required or value != field.default:
                parts[key] = None if value is None else field.write(value)
        return ordered(parts, self._written)

    def copy(self) -> Self:
        """Independent copy, with everything below it."""
        values = {
            key: None if (value := getattr(self, key)) is None else field.duplicate(value)
            for key, field in self.fields().items()
        }
        twin = type(self)(**values)
        twin._written = self._written
        return twin

    def same_as(self, other: Self) -> bool:
        """Whether both say the same, whatever their sources wrote out or left to defaults."""
        return type(self) is type(other) and all(
            _alike(getattr(self, key), getattr(other, key)) for key in self.fields()
        )


def _alike(one: Any, other: Any) -> bool:
    if isinstance(one, Entity):
        return isinstance(other, Entity) and one.same_as(other)
    if isinstance(one, list) and isinstance(other, list):
        return len(one) == len(other) and all(map(_alike, one, other))
    if isinstance(one, dict) and isinstance(other, dict):
        return one.keys() == other.keys() and all(_alike(one[key], other[key]) for key in one)
    return one == other


def read_fields(fields: Mapping[str, Field], raw: Mapping[str, Any], path: str) -> Iterator[tuple[str, Any]]:
    """Values of the declared ``fields`` that the object ``raw`` at ``path`` gives. Raises ScenarioError."""
    for key, field in fields.items():
        where = join(path, key)
        if key not in raw:
            if field.required:
                raise ScenarioError(where, f"missing; allowed {field.allowed}")
        elif raw[key] is not None:
            yield key, field.read(raw[key], where)
        elif field.required or field.default is not None:
            raise ScenarioError(where, f"null is not a value here; allowed {field.allowed}")


class _Part(Value):
    """Field made of entities of the class ``item``."""

    __slots__ = ["item"]
    _slot_defaults = Value._slot_defaults | {"item": Entity}


class Child(_Part):
    """One entity, or none."""

    __slots__ = []

    @property
    def allowed(self) -> str:
        return "an object with named parts"

    def fault(self, value: Any) -> str:
        return (
            "" if isinstance(value, self.item) else f"{shown(value)} is not of the kind {self.item.__name__}"
        )

    def read(self, raw: Any, path: str) -> Entity:
        return self.item.from_dict(raw, path)

    def write(self, value: Entity) -> dict[str, Any]:
        return value.to_dict()

    def duplicate(self, value: Entity) -> Entity:
        return value.copy()


class Children(_Part):
    """A list of entities; ``most`` limits how many."""

    __slots__ = ["most"]
    _slot_defaults = _Part._slot_defaults | {"most": 50}

    @property
    def allowed(self) -> str:
        return f"a list of {'1' if self.required else '0'} to {self.most} objects"

    def fault(self, value: Any) -> str:
        return list_fault(value, int(self.required), self.most, self.allowed)

    def read(self, raw: Any, path: str) -> list[Entity]:
        parts = enumerate(self.accepted(raw, path))
        return [self.item.from_dict(part, join(path, position)) for position, part in parts]

    def write(self, value: list[Entity]) -> list[dict[str, Any]]:
        return [part.to_dict() for part in value]

    def duplicate(self, value: list[Entity]) -> list[Entity]:
        return [part.copy() for part in value]


class Table(_Part):
    """Entities by name; ``most`` limits how many."""

    __slots__ = ["most"]
    _slot_defaults = _Part._slot_defaults | {"most": 500}

    @property
    def allowed(self) -> str:
        return f"an object with parts by name, at most {self.most}"

    def fault(self, value: Any) -> str:
        return object_fault(value, self.most)

    def read(self, raw: Any, path: str) -> dict[str, Entity]:
        parts = self.accepted(raw, path).items()
        return {key: self.item.from_dict(part, join(path, _name(key, path))) for key, part in parts}

    def write(self, value: dict[str, Entity]) -> dict[str, Any]:
        return {key: part.to_dict() for key, part in value.items()}

    def duplicate(self, value: dict[str, Entity]) -> dict[str, Entity]:
        return {key: part.copy() for key, part in value.items()}


def _name(key: str, path: str, limit: int = 200) -> str:
    """A name used as a key, once it is fit to be one."""
    fault = text_fault(key, limit)
    if fault or not key.strip():
        raise ScenarioError(join(path, key), fault or "the name is empty; allowed text")
    return key

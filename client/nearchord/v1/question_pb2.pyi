from google.protobuf.internal import containers as _containers
from google.protobuf.internal import enum_type_wrapper as _enum_type_wrapper
from google.protobuf import descriptor as _descriptor
from google.protobuf import message as _message
from collections.abc import Iterable as _Iterable, Mapping as _Mapping
from typing import ClassVar as _ClassVar, Optional as _Optional, Union as _Union

DESCRIPTOR: _descriptor.FileDescriptor

class WhenOver(int, metaclass=_enum_type_wrapper.EnumTypeWrapper):
    __slots__ = ()
    WHEN_OVER_UNSPECIFIED: _ClassVar[WhenOver]
    WHEN_OVER_BOUND: _ClassVar[WhenOver]
    WHEN_OVER_STOP: _ClassVar[WhenOver]
WHEN_OVER_UNSPECIFIED: WhenOver
WHEN_OVER_BOUND: WhenOver
WHEN_OVER_STOP: WhenOver

class IndependentSet(_message.Message):
    __slots__ = ("must", "never", "prices", "conflict_prices", "best", "count", "limit", "scenarios")
    MUST_FIELD_NUMBER: _ClassVar[int]
    NEVER_FIELD_NUMBER: _ClassVar[int]
    PRICES_FIELD_NUMBER: _ClassVar[int]
    CONFLICT_PRICES_FIELD_NUMBER: _ClassVar[int]
    BEST_FIELD_NUMBER: _ClassVar[int]
    COUNT_FIELD_NUMBER: _ClassVar[int]
    LIMIT_FIELD_NUMBER: _ClassVar[int]
    SCENARIOS_FIELD_NUMBER: _ClassVar[int]
    must: _containers.RepeatedScalarFieldContainer[int]
    never: _containers.RepeatedScalarFieldContainer[int]
    prices: bool
    conflict_prices: bool
    best: int
    count: bool
    limit: int
    scenarios: int
    def __init__(self, must: _Optional[_Iterable[int]] = ..., never: _Optional[_Iterable[int]] = ..., prices: bool = ..., conflict_prices: bool = ..., best: _Optional[int] = ..., count: bool = ..., limit: _Optional[int] = ..., scenarios: _Optional[int] = ...) -> None: ...

class VertexCover(_message.Message):
    __slots__ = ("must", "never")
    MUST_FIELD_NUMBER: _ClassVar[int]
    NEVER_FIELD_NUMBER: _ClassVar[int]
    must: _containers.RepeatedScalarFieldContainer[int]
    never: _containers.RepeatedScalarFieldContainer[int]
    def __init__(self, must: _Optional[_Iterable[int]] = ..., never: _Optional[_Iterable[int]] = ...) -> None: ...

class Fill(_message.Message):
    __slots__ = ()
    def __init__(self) -> None: ...

class Structure(_message.Message):
    __slots__ = ()
    def __init__(self) -> None: ...

class Clique(_message.Message):
    __slots__ = ("must", "never")
    MUST_FIELD_NUMBER: _ClassVar[int]
    NEVER_FIELD_NUMBER: _ClassVar[int]
    must: _containers.RepeatedScalarFieldContainer[int]
    never: _containers.RepeatedScalarFieldContainer[int]
    def __init__(self, must: _Optional[_Iterable[int]] = ..., never: _Optional[_Iterable[int]] = ...) -> None: ...

class ColourableSubgraph(_message.Message):
    __slots__ = ("must", "never", "colours", "prices", "scenarios")
    MUST_FIELD_NUMBER: _ClassVar[int]
    NEVER_FIELD_NUMBER: _ClassVar[int]
    COLOURS_FIELD_NUMBER: _ClassVar[int]
    PRICES_FIELD_NUMBER: _ClassVar[int]
    SCENARIOS_FIELD_NUMBER: _ClassVar[int]
    must: _containers.RepeatedScalarFieldContainer[int]
    never: _containers.RepeatedScalarFieldContainer[int]
    colours: int
    prices: bool
    scenarios: int
    def __init__(self, must: _Optional[_Iterable[int]] = ..., never: _Optional[_Iterable[int]] = ..., colours: _Optional[int] = ..., prices: bool = ..., scenarios: _Optional[int] = ...) -> None: ...

class InducedForest(_message.Message):
    __slots__ = ("must", "never", "prices", "scenarios")
    MUST_FIELD_NUMBER: _ClassVar[int]
    NEVER_FIELD_NUMBER: _ClassVar[int]
    PRICES_FIELD_NUMBER: _ClassVar[int]
    SCENARIOS_FIELD_NUMBER: _ClassVar[int]
    must: _containers.RepeatedScalarFieldContainer[int]
    never: _containers.RepeatedScalarFieldContainer[int]
    prices: bool
    scenarios: int
    def __init__(self, must: _Optional[_Iterable[int]] = ..., never: _Optional[_Iterable[int]] = ..., prices: bool = ..., scenarios: _Optional[int] = ...) -> None: ...

class Colouring(_message.Message):
    __slots__ = ()
    def __init__(self) -> None: ...

class FractionalColouring(_message.Message):
    __slots__ = ()
    def __init__(self) -> None: ...

class Question(_message.Message):
    __slots__ = ("independent_set", "vertex_cover", "fill", "structure", "clique", "colourable_subgraph", "induced_forest", "colouring", "fractional_colouring")
    INDEPENDENT_SET_FIELD_NUMBER: _ClassVar[int]
    VERTEX_COVER_FIELD_NUMBER: _ClassVar[int]
    FILL_FIELD_NUMBER: _ClassVar[int]
    STRUCTURE_FIELD_NUMBER: _ClassVar[int]
    CLIQUE_FIELD_NUMBER: _ClassVar[int]
    COLOURABLE_SUBGRAPH_FIELD_NUMBER: _ClassVar[int]
    INDUCED_FOREST_FIELD_NUMBER: _ClassVar[int]
    COLOURING_FIELD_NUMBER: _ClassVar[int]
    FRACTIONAL_COLOURING_FIELD_NUMBER: _ClassVar[int]
    independent_set: IndependentSet
    vertex_cover: VertexCover
    fill: Fill
    structure: Structure
    clique: Clique
    colourable_subgraph: ColourableSubgraph
    induced_forest: InducedForest
    colouring: Colouring
    fractional_colouring: FractionalColouring
    def __init__(self, independent_set: _Optional[_Union[IndependentSet, _Mapping]] = ..., vertex_cover: _Optional[_Union[VertexCover, _Mapping]] = ..., fill: _Optional[_Union[Fill, _Mapping]] = ..., structure: _Optional[_Union[Structure, _Mapping]] = ..., clique: _Optional[_Union[Clique, _Mapping]] = ..., colourable_subgraph: _Optional[_Union[ColourableSubgraph, _Mapping]] = ..., induced_forest: _Optional[_Union[InducedForest, _Mapping]] = ..., colouring: _Optional[_Union[Colouring, _Mapping]] = ..., fractional_colouring: _Optional[_Union[FractionalColouring, _Mapping]] = ...) -> None: ...

class Budget(_message.Message):
    __slots__ = ("fill", "states", "seconds", "memory_bytes")
    FILL_FIELD_NUMBER: _ClassVar[int]
    STATES_FIELD_NUMBER: _ClassVar[int]
    SECONDS_FIELD_NUMBER: _ClassVar[int]
    MEMORY_BYTES_FIELD_NUMBER: _ClassVar[int]
    fill: int
    states: int
    seconds: float
    memory_bytes: int
    def __init__(self, fill: _Optional[int] = ..., states: _Optional[int] = ..., seconds: _Optional[float] = ..., memory_bytes: _Optional[int] = ...) -> None: ...

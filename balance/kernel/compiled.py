"""How the room's functions are compiled: `entry` for what Python calls, `part` and `inlined` for what stands inside.

numba compiles every function on its own: it optimises and translates a callee again in each of its callers, level after
level, which made more than half of the first run. A part's code is therefore left as it was lowered, and optimised once,
in the entries it ends up in. A part that Python calls all the same (tests do) becomes an entry of its own by that.

No function here allocates: with `_nrt=False` compiled code counts no references of arrays, which made five sixths of a
trial (measured; not one bit changes).
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from numba import _dynfunc, njit, types
from numba.core.codegen import JITCodeLibrary
from numba.core.compiler import CompilerBase, DefaultPassBuilder
from numba.core.compiler_machinery import PassManager, register_pass
from numba.core.typed_passes import NativeLowering

COMMON: dict[str, Any] = {"error_model": "numpy", "_nrt": False}
"""Division by zero gives inf as in numpy: no branch for an exception."""


FUSED = {"contract"}
"""What the compiler may do with floats in lanes: a·b + c rounded once. The order of sums stays."""


class PartLibrary(JITCodeLibrary):  # type: ignore[misc]
    """The code of one part and of what it calls, neither optimised nor translated."""

    def finalize(self) -> None:
        """Put in what the part calls, and leave it at that."""
        self._raise_if_finalized()
        for library in dict.fromkeys(self._linking_libraries):
            self._reload_init.update(library._reload_init)
            self._final_module.link_in(library._get_module_for_linking(), preserve=True)
        self._finalized = True


@register_pass(mutates_CFG=True, analysis_only=False)
class PartLowering(NativeLowering):  # type: ignore[misc]
    """numba's lowering into a `PartLibrary`; callers know the part by its name, there is no address to call."""

    _name = "part_lowering"

    def run_pass(self, state: Any) -> bool:
        """Lower one part; True: the state was changed."""
        state.library = PartLibrary(state.targetctx.codegen(), state.func_id.func_qualname)
        state.flags.no_compile = True
        changed = super().run_pass(state)
        lowered = state["cr"]
        name, module = state.func_id.func_name, lowered.fndesc.lookup_module()
        stand_in = _dynfunc.make_function(module, name, "part of compiled code", 0, lowered.env, (state.library,))
        state["cr"] = lowered._replace(cfunc=stand_in)
        state.targetctx.insert_user_function(stand_in, lowered.fndesc, [state.library])
        return bool(changed)


class PartCompiler(CompilerBase):  # type: ignore[misc]
    """numba's own passes with `PartLowering` in the place of its lowering."""

    def define_pipelines(self) -> list[Any]:
        """Return the one list of passes."""
        return [passes_with(self.state, "part", PartLowering)]


class WideLibrary(JITCodeLibrary):  # type: ignore[misc]
    """Code whose vectors are as wide as the processor has them; LLVM stays at half of AVX-512 unless a function asks."""

    def add_ir_module(self, ir_module: Any) -> None:
        """Let every function defined here ask; llvmlite prints what it does not know as it stands."""
        for function in ir_module.functions:
            if not function.is_declaration:
                set.add(function.attributes, '"prefer-vector-width"="512"')
        super().add_ir_module(ir_module)


@register_pass(mutates_CFG=True, analysis_only=False)
class WideLowering(NativeLowering):  # type: ignore[misc]
    """numba's lowering into a `WideLibrary`."""

    _name = "wide_lowering"

    def run_pass(self, state: Any) -> bool:
        """Lower one entry; True: the state was changed."""
        state.library = WideLibrary(state.targetctx.codegen(), state.func_id.func_qualname)
        state.library.enable_object_caching()
        return bool(super().run_pass(state))


class WideCompiler(CompilerBase):  # type: ignore[misc]
    """numba's own passes with `WideLowering` in the place of its lowering."""

    def define_pipelines(self) -> list[Any]:
        """Return the one list of passes."""
        return [passes_with(self.state, "wide", WideLowering)]


def passes_with(state: Any, name: str, lowering: type[NativeLowering]) -> PassManager:
    """Return numba's passes with another lowering."""
    passes = PassManager(name)
    for kind, words in DefaultPassBuilder.define_nopython_pipeline(state).passes:
        passes.add_pass(lowering if kind is NativeLowering else kind, words)
    passes.finalize()
    return passes


class Part:
    """A part: compiled code takes it for a compiled function; called from Python it compiles an entry of its own."""

    def __init__(self, function: Callable[..., Any], **options: Any) -> None:
        self.py_func = function
        self.__doc__, self.__name__, self.__module__ = function.__doc__, function.__name__, function.__module__
        self._entry: Any = None
        lowered = njit(pipeline_class=PartCompiler, no_cpython_wrapper=True, no_cfunc_wrapper=True, **COMMON, **options)
        self._dispatcher = lowered(function)
        self._numba_type_ = types.Dispatcher(self._dispatcher)   # numba's name for "take this as"

    def __call__(self, *given: Any) -> Any:
        """Run the part compiled by itself."""
        if self._entry is None:
            self._entry = njit(cache=True, **COMMON)(self.py_func)
        return self._entry(*given)


def entry(function: Callable[..., Any]) -> Any:
    """Compile what Python calls: optimised, kept on disk, free of the interpreter's lock."""
    return njit(cache=True, nogil=True, no_cfunc_wrapper=True, **COMMON)(function)


def lanes_entry(function: Callable[..., Any]) -> Any:
    """Compile an entry whose innermost loops run over lanes: products and sums are fused, as in what it calls (`fused`)."""
    wide = njit(cache=True, nogil=True, no_cfunc_wrapper=True, fastmath=FUSED, pipeline_class=WideCompiler, **COMMON)
    return wide(function)


def fused(function: Any) -> Any:
    """Lower a scalar function, or a part's own, for a loop over lanes: never a call, products and sums fused.

    The definition stays one: the single trace runs the same Python function unfused.
    """
    return Part(getattr(function, "py_func", function), forceinline=True, fastmath=FUSED)


def part(function: Callable[..., Any]) -> Any:
    """Compile what entries call."""
    return Part(function)


def inlined(function: Callable[..., Any]) -> Any:
    """Compile what entries call in their hot loops: never a call."""
    return Part(function, forceinline=True)

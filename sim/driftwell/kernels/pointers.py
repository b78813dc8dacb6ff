"""Kernels handed to other compiled code as addresses.

The caller is compiled for a signature, not for a function: it need not be compiled again for
another function, nor carry its code. Numba links all that a function calls into it and optimises
the whole again, at each level of callers, so large kernels are better called by their address.
"""

from __future__ import annotations

from typing import Any

import numba
from llvmlite import ir


class CompiledFunction(numba.types.WrapperAddressProtocol):
    """A kernel compiled for one signature, to be handed to other compiled code as its address."""

    def __init__(self, function: Any, signature: Any) -> None:
        core: Any = numba.core
        arguments, returned = core.sigutils.normalize_signature(signature)
        function.compile(arguments)
        self._function = function
        self._signature = core.typing.signature(returned, *arguments)

    def signature(self) -> Any:
        """Numba's signature of the function."""
        return self._signature

    def __wrapper_address__(self) -> int:
        """Address of the compiled function as others call it: plain values in, no status out."""
        made = self._function.overloads[self._signature.args]
        return int(made.library.get_pointer_to_function(made.fndesc.llvm_cfunc_wrapper_name))

    def __call__(self, *arguments: Any) -> Any:
        """Call the function from Python."""
        return self._function(*arguments)


def call_address(context: Any, builder: Any, signature: Any, address: Any, arguments: Any) -> Any:
    """Emit a call of the :class:`CompiledFunction` that stands at an address, an int64."""
    kinds = [context.get_value_type(each) for each in signature.args]
    function = ir.FunctionType(context.get_value_type(signature.return_type), kinds)
    return builder.call(builder.inttoptr(address, function.as_pointer()), arguments)

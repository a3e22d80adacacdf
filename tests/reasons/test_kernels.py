"""Kernels compile once each: arguments always come with the same types."""

from engine.reasons import kernels
from engine.reasons.prepare import prepare


def test_every_kernel_is_compiled_for_one_kind_of_arguments() -> None:
    prepare()
    compiled = {name: k for name, k in vars(kernels).items() if hasattr(k, "signatures")}
    assert len(compiled) > 8
    assert {name: len(k.signatures) for name, k in compiled.items() if len(k.signatures) > 1} == {}

"""The published rules by the names they are asked for."""

from collections.abc import Mapping
from types import MappingProxyType

from fieldfit.judge.rules.american import AMERICAN
from fieldfit.judge.rules.declare import Rule
from fieldfit.judge.rules.other import OTHER

__all__ = ["RULES"]

RULES: Mapping[str, Rule] = MappingProxyType({rule.name: rule for rule in (*AMERICAN, *OTHER)})

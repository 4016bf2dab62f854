"""A sheet made ready: parameters, functions, operators, domain, states."""

from specterm.model.build import build
from specterm.model.domain import Domain
from specterm.model.form import Form, Sturm
from specterm.model.function import Function
from specterm.model.hermitian import NotHermitian
from specterm.model.model import Model
from specterm.model.operator import Operator
from specterm.model.state import State

__all__ = ["Domain", "Form", "Function", "Model", "NotHermitian", "Operator", "State", "Sturm", "build"]

"""specterm: levels of an operator, with the digits that can be trusted."""

"""Gas springs: the law of the gas, the four forces that identify one, the way it is mounted."""

"""Coils, permanent magnets and lenses: fields of real hardware in closed form, compiled apart."""

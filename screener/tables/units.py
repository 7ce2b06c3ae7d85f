"""Units of measurement that are known by their signs."""

KNOWN_UNITS = frozenset({
    *("m", "cm", "mm", "µm", "μm", "um", "nm", "in", "ft", "s", "ms", "µs", "us", "min", "h", "d", "g"),
    *("mg", "kg", "t", "lb", "°C", "°F", "degC", "degF", "C", "F", "K", "V", "mV", "kV", "A", "mA", "µA"),
    *("uA", "kA", "W", "mW", "kW", "MW", "J", "kJ", "kWh", "Wh", "N", "kN", "mN", "Nm", "N·m", "Pa", "hPa"),
    *("kPa", "MPa", "bar", "mbar", "psi", "psig", "psia", "Torr", "mmHg", "Hz", "kHz", "MHz", "GHz", "rpm"),
    *("1/min", "1/s", "%", "‰", "ppm", "ppb", "dB", "dBm", "Ohm", "Ω", "kΩ", "MΩ", "mΩ", "µF", "pF", "H"),
    *("l", "L", "ml", "mL", "l/min", "L/min", "l/h", "m3/h", "m³/h", "kg/h", "kg/s", "m/s", "km/h", "mm/s"),
    *("m/s²", "g/l", "mg/l", "mg/L", "µg/l", "S", "mS", "µS", "µS/cm", "pH", "°", "deg", "rad", "lx", "cd"),
    *("mol"),
})  # fmt: skip
"""As instruments write them; a row of nothing else is a row of units."""

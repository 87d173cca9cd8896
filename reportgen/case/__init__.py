"""Case files: reading with positions, models, units to SI, JSON Schema."""

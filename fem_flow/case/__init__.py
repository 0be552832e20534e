"""What the user asks: the schema of a case, its TOML file, the fluid library, and the check of a case against its part."""

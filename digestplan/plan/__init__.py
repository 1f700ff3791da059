"""A plan: one sample's written treatment, read from a TOML file, checked, and saved again."""

"""The spec language: from a YAML file to a frozen, validated, expanded spec."""

"""From a brief to a few proposed sets of constants."""

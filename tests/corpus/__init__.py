"""Data and generators that several tests share; each table names its source. Nothing here imports patlint."""

"""The wing file's records: what may be stated, table by table."""

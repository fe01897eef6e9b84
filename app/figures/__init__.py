"""Drawing: a result of analytics in, a plotly figure out; nothing is computed here."""

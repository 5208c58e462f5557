"""Tables, files and figures made from results."""

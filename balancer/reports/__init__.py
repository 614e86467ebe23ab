"""What the reader sees: the terminal report and the JSON document of every answer."""

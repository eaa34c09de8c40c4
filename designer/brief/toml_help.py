from designer.errors import Fault


def help_with(text: str, name: str) -> tuple[list[Fault], str | None]:
    return [Fault(name, "", "", "TOML", "")], None

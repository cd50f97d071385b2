"""The colours of the report, each in a light and a dark setting.

A blue-green for what was computed and a burnt orange for what is allowed: apart in hue, in lightness and,
wherever they meet, in line style, so that no reading rests on colour alone.
"""

LIGHT = {
    "paper": "#fdfcf9",
    "panel": "#f4f1ea",
    "ink": "#1f2b33",
    "muted": "#55626b",
    "line": "#d8d3c7",
    "main": "#0b5d78",
    "band": "#8fbccb",
    "haze": "#cfe2e8",
    "mark": "#a3441a",
    "clay": "#ded3bf",
    "sand": "#f0e5bd",
    "fill": "#cfcdc8",
}
DARK = {
    "paper": "#15191c",
    "panel": "#1e2428",
    "ink": "#e9e5dc",
    "muted": "#abb5bb",
    "line": "#3c464c",
    "main": "#74c7e0",
    "band": "#27627a",
    "haze": "#224653",
    "mark": "#f2a478",
    "clay": "#4b4337",
    "sand": "#5d5535",
    "fill": "#50555a",
}


def style_variables(colours: dict[str, str]) -> str:
    """Write colours as custom properties of a style sheet.

    Parameters
    ----------
    colours : dict of str to str
        Colour of each role, as ``#rrggbb``.

    Returns
    -------
    css : str
        Declarations.
    """
    return "".join(f"--{role}:{colour};" for role, colour in colours.items())


def figure_rules() -> str:
    """Write the rules that recolour a figure drawn in the light setting.

    Returns
    -------
    css : str
        One rule per colour and use; figures keep the light colours where no style sheet reaches them.
    """
    return "\n".join(
        f'.figure svg [{use}="{colour}"]{{{use}:var(--{role})}}'
        for role, colour in LIGHT.items()
        for use in ("fill", "stroke")
    )

"""capstress: what every capacitor of a piece of equipment really bears."""

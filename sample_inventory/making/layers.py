"""The same joints as a map layer, the mains with their levels, and a small clean table."""

from __future__ import annotations

from pathlib import Path

import geopandas
import numpy as np
import pandas as pd
import pyogrio
import shapely

from .network import CRS, INVENTED, MAINS, UTILITY, stream
from .wording import FT, KNOWN_CLASS, KNOWN_TORQUE

WRITTEN = "2026-03-14T09:00:00.000Z"


def joint_layer(joints: pd.DataFrame) -> geopandas.GeoDataFrame:
    """What the map department keeps: fewer attributes, its own field names, numbers with the unit in the name."""
    rng = stream("layer")
    metric = (joints["practice"] == "metric").to_numpy()
    n = len(joints)
    inch = np.where(metric, 25.4, 1.0)

    def known(values, share):
        return pd.Series(values, index=joints.index).where(rng.random(n) < share)

    frame = pd.DataFrame(
        {
            "FLANGE_ID": joints["joint_id"],
            "PIPELINE_ID": joints["main_id"],
            "PRESSURE_ZONE": joints["zone"],
            "CHAINAGE_M": joints["chainage"].round(1),
            "ELEV_M": joints["elevation"].round(1),
            "NOM_SIZE": np.where(metric, "DN" + joints["size"].map("{:g}".format), joints["size"].map("{:g}".format) + " in"),
            "OD_SYSTEM": joints["system"],
            "SDR": joints["ratio"],
            "PIPE_MATERIAL": joints["material"],
            "FLANGE_SPEC": known(joints["ring_standard"], 0.5),
            "FLANGE_CLASS": known(joints["ring_class"], joints["practice"].map(KNOWN_CLASS)),
            "RING_MATERIAL": known(joints["ring_material"], 0.4),
            "RING_TYPE": known(joints["ring_form"], 0.4),
            "RING_SECTION": joints["ring_section"].where(joints["ring_section"] != ""),
            "RING_THK_IN": known((joints["ring_thickness"] / inch).round(3), 0.3),
            "NO_OF_BOLTS": known(joints["bolt_count"], 0.6),
            "BOLT_DIA_IN": known((joints["bolt_diameter"] / inch).round(3), 0.6),
            "BOLT_GRADE": known(joints["bolt_grade"], 0.5),
            "BOLT_TORQUE_FTLB": known(joints["torque_ftlb"], joints["practice"].map(KNOWN_TORQUE)),
            "MATES_WITH": known(joints["mating_side"], 0.7),
            "GASKET": known(joints["gasket"], 0.5),
            "LOCATION_TYPE": joints["setting"],
            "SOIL": known(joints["environment"], 0.5),
            "OP_PRESS_PSI": known(joints["operating"], 0.9),
            "SURGE_PSI": known(joints["recurrent"], 0.4),
            "MAX_SURGE_PSI": known(joints["occasional"], 0.3),
            "CYCLES_DAY": known(joints["cycles"], 0.3),
            "INSTALL_YEAR": known(joints["year"], 0.95),
            "CUSTOMERS": joints["customers"],
            "CROSSING": joints["crossing"],
            "COST_OF_LEAK": joints["leak_cost"],
            "RETROFIT_COST": joints["retrofit_cost"],
            "SHUTDOWN_GROUP": joints["access_group"],
            "DATA_ORIGIN": "invented",
        }
    )
    for column in ("NO_OF_BOLTS", "INSTALL_YEAR", "CYCLES_DAY", "CUSTOMERS", "COST_OF_LEAK", "RETROFIT_COST"):
        frame[column] = frame[column].astype("Int32")
    places = shapely.points(joints[["x", "y", "elevation"]].round(2).to_numpy(dtype=float))
    return geopandas.GeoDataFrame(frame, geometry=places, crs=CRS)


def main_layer(lines: dict[str, np.ndarray]) -> geopandas.GeoDataFrame:
    """Mains as lines with the level of the pipe's centre line at every corner."""
    rows = [
        {
            "PIPELINE_ID": main.main_id,
            "PRESSURE_ZONE": main.zone,
            "NOM_SIZE": f"DN{main.size:g}" if main.system == "ISO" else f"{main.size:g} in",
            "OD_SYSTEM": main.system,
            "SDR": main.ratio,
            "PIPE_MATERIAL": main.material,
            "LENGTH_M": round(main.length, 1),
            "YEAR_FROM": main.years[0],
            "YEAR_TO": main.years[1],
            "DATA_ORIGIN": "invented",
        }
        for main in MAINS
    ]
    shapes = [shapely.linestrings(np.round(lines[main.main_id][:, :3], 2)) for main in MAINS]
    return geopandas.GeoDataFrame(pd.DataFrame(rows), geometry=shapes, crs=CRS)


def write_package(path: Path, joints: pd.DataFrame, lines: dict[str, np.ndarray]) -> None:
    """GeoPackage with the layers `flanged_joints` and `mains`; its metadata says that it is invented."""
    path.unlink(missing_ok=True)
    pyogrio.set_gdal_config_options({"OGR_CURRENT_DATE": WRITTEN, "GDAL_PAM_ENABLED": "NO"})
    says = {"TITLE": f"{UTILITY} (invented)", "ABSTRACT": INVENTED, "ORIGIN": "invented"}
    for name, layer, kind in (("flanged_joints", joint_layer(joints), "Point Z"), ("mains", main_layer(lines), "LineString Z")):
        pyogrio.write_dataframe(
            layer,
            path,
            layer=name,
            driver="GPKG",
            append=path.exists(),
            geometry_type=kind,
            layer_metadata=says,
            layer_options={"IDENTIFIER": f"{name} (invented)", "DESCRIPTION": INVENTED},
        )
    pyogrio.set_gdal_config_options({"OGR_CURRENT_DATE": None, "GDAL_PAM_ENABLED": None})



CLEAN = {
    "Joint": "joint_id",
    "Main": "main_id",
    "Pressure zone": "zone",
    "Chainage (ft)": "chainage_ft",
    "Easting": "x",
    "Northing": "y",
    "Elevation (ft)": "elevation_ft",
    "Nominal size (in)": "size",
    "Size system": "system",
    "Dimension ratio": "ratio",
    "PE material": "material",
    "Hub outside diameter (in)": "hub_outside",
    "Hub thickness (in)": "hub_thickness",
    "Ring standard": "ring_standard",
    "Ring class": "ring_class",
    "Ring material": "ring_material",
    "Ring form": "ring_form",
    "Ring outside diameter (in)": "ring_outside",
    "Ring bore (in)": "ring_bore",
    "Ring thickness (in)": "ring_thickness",
    "Bolt circle diameter (in)": "bolt_circle",
    "Ring coating": "coating",
    "Number of bolts": "bolt_count",
    "Bolt diameter (in)": "bolt_diameter",
    "Bolt grade": "bolt_grade",
    "Torque at assembly (ft-lb)": "torque",
    "Bolt lubrication": "bolt_lubrication",
    "Tightening method": "tightening_method",
    "Last tightened": "tightened",
    "Gasket": "gasket",
    "Mating side": "mating_side",
    "Setting": "setting",
    "Axial restraint": "restraint",
    "Environment": "environment",
    "Operating temperature (F)": "temperature_f",
    "Seasonal temperature range (F)": "season_f",
    "Operating pressure (psi)": "operating",
    "Test pressure (psi)": "test",
    "Recurrent surge (psi)": "recurrent",
    "Occasional surge (psi)": "occasional",
    "Pressure cycles per day": "cycles",
    "Range of the cycles (psi)": "cycle_range",
    "Year installed": "year",
    "Customers": "customers",
    "Crossing": "crossing",
    "Cost of a leak": "leak_cost",
    "Retrofit cost": "retrofit_cost",
    "Access group": "access_group",
    "Origin": "origin",
}


def clean_table(joints: pd.DataFrame) -> pd.DataFrame:
    """Forty flat-ring inch joints, all eras and zones but the metric one, with everything known and right."""
    inch = joints[(joints["practice"] != "metric") & (joints["ring_form"] == "flat plate")]
    rows = []
    for _, group in inch.groupby("main_id", sort=True):
        rows += list(group.index[:: max(1, len(group) // 2)][:2])
    frame = joints.loc[rows[:40]].copy()
    frame["chainage_ft"] = (frame["chainage"] / FT).round(1)
    frame["elevation_ft"] = (frame["elevation"] / FT).round(1)
    frame[["x", "y"]] = frame[["x", "y"]].round(2)
    frame["temperature_f"] = (frame["temperature"] * 1.8 + 32).round(1)
    frame["season_f"] = (frame["season"] * 1.8).round(1)
    frame["tightened"] = np.where(frame["last_tightened"] > 0, frame["last_tightened"], frame["year"])
    frame["environment"] = frame["environment"].replace("made ground", "aggressive soil")
    frame["origin"] = "invented"
    return pd.DataFrame({heading: frame[name].to_numpy() for heading, name in CLEAN.items()})

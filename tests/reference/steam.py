"""Saturation pressure of ordinary water, by the iapws package (IAPWS-IF97 region 4, wide-range IAPWS-95 beside it)."""

from iapws import IAPWS95, IAPWS97

from reference_csv import write_table

TEMPERATURES_C = [20, 40, 60, 80, 99.974, 100, 120, 150, 180, 200, 220, 250, 280, 300, 320, 340, 350, 360, 370, 373]


def main():
    rows = []
    for t in TEMPERATURES_C:
        industrial, scientific = IAPWS97(T=t + 273.15, x=0).P, IAPWS95(T=t + 273.15, x=0).P
        assert abs(industrial / scientific - 1) < 1e-3
        rows.append((float(t), industrial * 1e6, scientific * 1e6))
    write_table("steam.csv", "Saturation pressure of water, IAPWS-IF97 and IAPWS-95.", ["iapws", "scipy"],
                ["temperature_c", "saturation_pressure_if97_pa", "saturation_pressure_iapws95_pa"], rows)


if __name__ == "__main__":
    main()

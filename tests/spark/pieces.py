"""Spreads an inventory over Apache Spark: each partition's features go through `spallcast assess` as lines.

The numbers are those of one run, because a boulder's numbers depend on its own record, the burns, the settings and the
seed, and on nothing else. `rdd.pipe` keeps the order of the lines and of the partitions.

    python pieces.py --program ./spallcast --burn burns.geojson --boulders boulders.ndjson --out results.ndjson
                     [--terrain heights.tif] [--settings settings.toml] [--pieces 8] [--master local[2]]
"""

import argparse
import os
import shlex

from pyspark import SparkFiles
from pyspark.sql import SparkSession


def main():
    parser = argparse.ArgumentParser(description=__doc__.split("\n")[0])
    parser.add_argument("--program", required=True)
    parser.add_argument("--burn", required=True)
    parser.add_argument("--boulders", required=True, help="newline-delimited GeoJSON features")
    parser.add_argument("--out", required=True)
    parser.add_argument("--terrain")
    parser.add_argument("--settings")
    parser.add_argument("--pieces", type=int, default=8)
    parser.add_argument("--master", default="local[2]")
    arguments = parser.parse_args()

    spark = SparkSession.builder.master(arguments.master).appName("spallcast").config("spark.ui.enabled", "false")
    spark = spark.getOrCreate()
    context = spark.sparkContext
    context.setLogLevel("ERROR")

    # Files that every piece needs travel with the job. Where workers mount the same disk, plain paths do as well.
    def shipped(path):
        context.addFile(os.path.abspath(path))
        return os.path.basename(path)

    names = {flag: shipped(path) for flag, path in vars(arguments).items()
             if flag in ("program", "burn", "terrain", "settings") and path}
    local = arguments.master.startswith("local")
    boulders = arguments.boulders if "://" in arguments.boulders else os.path.abspath(arguments.boulders)
    partitions = context.textFile(boulders, arguments.pieces)

    def command(folder):
        place = {flag: shlex.quote(os.path.join(folder, name)) for flag, name in names.items()}
        options = " ".join(f"--{flag} {path}" for flag, path in place.items() if flag != "program")
        # One thread a piece: Spark already runs as many pieces as there are cores. Exit code 3 says that some records could
        # not be assessed; each of them says why in its own line, so the piece is good.
        run = f"chmod +x {place['program']}; {place['program']} assess {options} --boulders - --out - --threads 1 --quiet"
        return "sh -c " + shlex.quote(f'{run}; code=$?; [ "$code" -eq 3 ] || exit "$code"')

    # checkCode: without it a piece that fails gives no lines and no error. Workers of a cluster find the job's files in
    # their working folder.
    lines = partitions.pipe(command(SparkFiles.getRootDirectory() if local else "."), checkCode=True)
    with open(arguments.out, "w", encoding="utf-8", newline="\n") as out:
        for line in lines.toLocalIterator():
            out.write(line + "\n")
    spark.stop()


if __name__ == "__main__":
    main()

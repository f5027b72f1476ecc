//! A probe as JSON, as CSV tables and as text. Field units: C, mm, MPa, kW/m2, MJ/m2, MN/m.

use serde::Serialize;

use super::probe_source::{self, Standing, StandingDoc};
use crate::assess::probe::{BRANCHES, Probe};
use crate::assess::{Assessment, Quantiles};
use crate::units::{J_PER_MJ, M2_S_PER_MM2_S, MM_PER_M, PA_PER_MPA, W_PER_KW, celsius};

const N_PER_MN: f64 = 1e6;
const PA_PER_GPA: f64 = 1e9;

#[derive(Serialize)]
struct EventRow {
    family: &'static str,
    time_s: f64,
    depth_mm: f64,
    surface_c: f64,
}

#[derive(Serialize)]
struct Properties {
    diffusivity_mm2_s: f64,
    conductivity_w_m_k: f64,
    density_kg_m3: f64,
    specific_heat_j_kg_k: f64,
    emissivity: f64,
    initial_c: f64,
    expansion_per_k: f64,
    youngs_modulus_gpa: f64,
    poissons_ratio: f64,
    compressive_strength_mpa: f64,
    tensile_strength_mpa: f64,
    fracture_toughness_mpa_sqrt_m: f64,
    porosity: f64,
    heated_fraction: f64,
    slab_strength_mpa: f64,
    flakable_share: f64,
    /// Plateau of the pulse; null under a measured series.
    irradiance_kw_m2: Option<f64>,
    gas_c: Option<f64>,
    h_w_m2k: Option<f64>,
    residence_s: Option<f64>,
    decay_s: Option<f64>,
}

#[derive(Serialize)]
struct Range {
    p05: f64,
    p50: f64,
    p95: f64,
}

#[derive(Serialize)]
struct Ensemble {
    draws: usize,
    seed: u64,
    peak_surface_c: Option<Range>,
    absorbed_mj_m2_p50: Option<f64>,
    heated_depth_mm: Option<f64>,
    p_spall: Option<f64>,
    p_spall_se: Option<f64>,
    p_flake: Option<f64>,
    p_slab: Option<f64>,
    p_split: Option<f64>,
    p_rind: Option<f64>,
    spall_thickness_mm: Option<f64>,
    spall_thickness_quantiles_mm: Option<Range>,
    flake_thickness_mm: Option<f64>,
    slab_thickness_mm: Option<f64>,
    loss_mm: Option<f64>,
    reason: String,
}

#[derive(Serialize)]
struct Document<'a> {
    program: &'static str,
    version: &'static str,
    subject: &'a str,
    rock: &'a str,
    exposure: Option<&'a str>,
    branch: &'static str,
    conduction: &'static str,
    depth_mm: Vec<f64>,
    time_s: &'a [f64],
    temperature_c: Vec<Vec<f64>>,
    surface_c: Vec<f64>,
    flux_kw_m2: Vec<f64>,
    absorbed_mj_m2: f64,
    absorbed_mj_m2_at: Vec<f64>,
    skin_stress_mpa: Vec<Vec<f64>>,
    membrane_force_mn_m: Vec<f64>,
    normal_tension_mpa: Vec<f64>,
    heated_depth_mm: Option<f64>,
    events: Vec<EventRow>,
    energy_balance_error: f64,
    steps: usize,
    properties: Properties,
    ensemble: Option<Ensemble>,
    #[serde(flatten)]
    standing: StandingDoc,
}

/// What a probe is about, for its head.
#[derive(Debug, Clone)]
pub struct Subject {
    /// Who or what was probed.
    pub name: String,
    /// Catalogue rock.
    pub rock: String,
    /// Exposure class; `None` under a measured series.
    pub exposure: Option<String>,
}

/// An ensemble run beside the medians.
#[derive(Debug, Clone)]
pub struct EnsembleRun {
    /// Draws.
    pub draws: usize,
    /// Seed.
    pub seed: u64,
    /// Its figures.
    pub assessment: Assessment,
}

fn each(values: &[f64], unit: f64) -> Vec<f64> {
    values.iter().map(|v| v / unit).collect()
}

/// Depths come back as they were asked for: 2 mm is 2, not 2.0000000000000004.
fn whole_micrometres(depth_m: &[f64]) -> Vec<f64> {
    depth_m.iter().map(|z| (z * MM_PER_M * 1e6).round() / 1e6).collect()
}

fn range(q: Quantiles, f: impl Fn(f64) -> f64) -> Range {
    Range { p05: f(q.p05), p50: f(q.p50), p95: f(q.p95) }
}

fn ensemble(run: &EnsembleRun) -> Ensemble {
    let (heat, spall) = (&run.assessment.heat, &run.assessment.spall);
    let mm = |x: f64| x * MM_PER_M;
    Ensemble {
        draws: run.draws,
        seed: run.seed,
        peak_surface_c: heat.as_ref().map(|h| range(h.peak_surface_k, celsius)),
        absorbed_mj_m2_p50: heat.as_ref().map(|h| h.absorbed_j_m2_p50 / J_PER_MJ),
        heated_depth_mm: heat.as_ref().map(|h| mm(h.heated_depth_m)),
        p_spall: spall.as_ref().map(|s| s.p_spall),
        p_spall_se: spall.as_ref().map(|s| s.p_spall_se),
        p_flake: spall.as_ref().map(|s| s.p_flake),
        p_slab: spall.as_ref().map(|s| s.p_slab),
        p_split: spall.as_ref().map(|s| s.p_split),
        p_rind: spall.as_ref().and_then(|s| s.p_rind),
        spall_thickness_mm: spall.as_ref().and_then(|s| s.thickness_m).map(mm),
        spall_thickness_quantiles_mm: spall.as_ref().and_then(|s| s.thickness_quantiles_m).map(|q| range(q, mm)),
        flake_thickness_mm: spall.as_ref().and_then(|s| s.flake_thickness_m).map(mm),
        slab_thickness_mm: spall.as_ref().and_then(|s| s.slab_thickness_m).map(mm),
        loss_mm: spall.as_ref().map(|s| mm(s.loss_m)),
        reason: run.assessment.reason.clone(),
    }
}

fn properties(probe: &Probe, pulse: bool) -> Properties {
    let d = &probe.draw;
    Properties {
        diffusivity_mm2_s: d.diffusivity_m2_s / M2_S_PER_MM2_S,
        conductivity_w_m_k: d.diffusivity_m2_s * d.density_kg_m3 * d.specific_heat_j_kg_k,
        density_kg_m3: d.density_kg_m3,
        specific_heat_j_kg_k: d.specific_heat_j_kg_k,
        emissivity: d.emissivity,
        initial_c: celsius(d.ambient_k),
        expansion_per_k: d.expansion_per_k,
        youngs_modulus_gpa: d.youngs_modulus_pa / PA_PER_GPA,
        poissons_ratio: d.poissons_ratio,
        compressive_strength_mpa: d.compressive_strength_pa / PA_PER_MPA,
        tensile_strength_mpa: d.tensile_strength_pa / PA_PER_MPA,
        fracture_toughness_mpa_sqrt_m: d.fracture_toughness / PA_PER_MPA,
        porosity: d.porosity,
        heated_fraction: d.heated_share,
        slab_strength_mpa: d.slab_strength_pa / PA_PER_MPA,
        flakable_share: d.flakable_share,
        irradiance_kw_m2: pulse.then_some(d.irradiance_w_m2 / W_PER_KW),
        gas_c: pulse.then(|| celsius(d.gas_k)),
        h_w_m2k: pulse.then_some(d.h_w_m2_k),
        residence_s: pulse.then_some(d.residence_s),
        decay_s: pulse.then_some(d.decay_s),
    }
}

fn events(probe: &Probe) -> Vec<EventRow> {
    let mut rows: Vec<EventRow> = probe
        .events
        .iter()
        .map(|e| EventRow {
            family: e.family.word(),
            time_s: e.time_s,
            depth_mm: e.depth_m * MM_PER_M,
            surface_c: celsius(e.surface_k),
        })
        .collect();
    rows.sort_by(|a, b| a.time_s.total_cmp(&b.time_s));
    rows
}

/// The probe as JSON.
pub fn json(
    subject: &Subject,
    probe: &Probe,
    ensemble_run: Option<&EnsembleRun>,
    standing: Option<&Standing>,
) -> String {
    let pulse = subject.exposure.is_some();
    let document = Document {
        program: "spallcast",
        version: env!("CARGO_PKG_VERSION"),
        subject: &subject.name,
        rock: &subject.rock,
        exposure: subject.exposure.as_deref(),
        branch: BRANCHES,
        conduction: if probe.sphere { "sphere" } else { "plane" },
        depth_mm: whole_micrometres(&probe.depth_m),
        time_s: &probe.time_s,
        temperature_c: probe.temperature_k.iter().map(|row| row.iter().map(|t| celsius(*t)).collect()).collect(),
        surface_c: probe.surface_k.iter().map(|t| celsius(*t)).collect(),
        flux_kw_m2: each(&probe.flux_w_m2, W_PER_KW),
        absorbed_mj_m2: probe.absorbed_j_m2 / J_PER_MJ,
        absorbed_mj_m2_at: each(&probe.absorbed_at_j_m2, J_PER_MJ),
        skin_stress_mpa: probe.skin_stress_pa.iter().map(|row| each(row, PA_PER_MPA)).collect(),
        membrane_force_mn_m: each(&probe.membrane_force_n_m, N_PER_MN),
        normal_tension_mpa: each(&probe.normal_tension_pa, PA_PER_MPA),
        heated_depth_mm: pulse.then(|| (probe.draw.diffusivity_m2_s * probe.draw.residence_s).sqrt() * MM_PER_M),
        events: events(probe),
        energy_balance_error: probe.energy_balance_error,
        steps: probe.steps,
        properties: properties(probe, pulse),
        ensemble: ensemble_run.map(ensemble),
        standing: probe_source::document(standing),
    };
    let mut text = serde_json::to_string_pretty(&document).expect("numbers and strings are always JSON");
    text.push('\n');
    text
}

/// The CSV files of a probe: name and text.
///
/// # Errors
/// Never in practice: the tables are written to memory.
pub fn csv_files(probe: &Probe) -> Result<Vec<(&'static str, String)>, csv::Error> {
    let depths: Vec<String> = whole_micrometres(&probe.depth_m).iter().map(|z| format!("{z}")).collect();
    let table = |values: &[Vec<f64>], prefix: &str, unit: &dyn Fn(f64) -> f64| -> Result<String, csv::Error> {
        let mut writer = csv::Writer::from_writer(Vec::new());
        let mut head = vec!["time_s".to_owned()];
        head.extend(depths.iter().map(|z| format!("{prefix}_at_{z}_mm")));
        writer.write_record(&head)?;
        for (time, row) in probe.time_s.iter().zip(values) {
            let mut cells = vec![time.to_string()];
            cells.extend(row.iter().map(|v| unit(*v).to_string()));
            writer.write_record(&cells)?;
        }
        finish(writer)
    };
    let temperature = table(&probe.temperature_k, "temperature_c", &celsius)?;
    let stress = table(&probe.skin_stress_pa, "skin_stress_mpa", &|s| s / PA_PER_MPA)?;

    let mut writer = csv::Writer::from_writer(Vec::new());
    writer.write_record([
        "time_s",
        "surface_c",
        "flux_kw_m2",
        "absorbed_mj_m2",
        "membrane_force_mn_m",
        "normal_tension_mpa",
    ])?;
    for i in 0..probe.time_s.len() {
        writer.write_record(
            [
                probe.time_s[i],
                celsius(probe.surface_k[i]),
                probe.flux_w_m2[i] / W_PER_KW,
                probe.absorbed_at_j_m2[i] / J_PER_MJ,
                probe.membrane_force_n_m[i] / N_PER_MN,
                probe.normal_tension_pa[i] / PA_PER_MPA,
            ]
            .map(|v| v.to_string()),
        )?;
    }
    let history = finish(writer)?;

    let mut writer = csv::Writer::from_writer(Vec::new());
    writer.write_record(["family", "time_s", "depth_mm", "surface_c"])?;
    for e in events(probe) {
        writer.write_record([
            e.family.to_owned(),
            e.time_s.to_string(),
            e.depth_mm.to_string(),
            e.surface_c.to_string(),
        ])?;
    }
    Ok(vec![
        ("temperature.csv", temperature),
        ("skin_stress.csv", stress),
        ("history.csv", history),
        ("events.csv", finish(writer)?),
    ])
}

fn finish(writer: csv::Writer<Vec<u8>>) -> Result<String, csv::Error> {
    let bytes = writer.into_inner().map_err(|e| std::io::Error::other(e.to_string()))?;
    Ok(String::from_utf8(bytes).expect("the tables hold text only"))
}

/// The probe as text: head, temperature table, events.
pub fn text(
    subject: &Subject,
    probe: &Probe,
    ensemble_run: Option<&EnsembleRun>,
    standing: Option<&Standing>,
) -> String {
    let p = properties(probe, subject.exposure.is_some());
    let mut out = format!(
        "{}\n  rock {}, exposure {}, conduction in a {}\n  {BRANCHES}\n  diffusivity {:.3} mm2/s, conductivity {:.2} W/mK, \
         density {:.0} kg/m3, specific heat {:.0} J/kgK, emissivity {:.2}\n\n",
        subject.name,
        subject.rock,
        subject.exposure.as_deref().unwrap_or("measured series"),
        if probe.sphere { "sphere" } else { "half-space" },
        p.diffusivity_mm2_s,
        p.conductivity_w_m_k,
        p.density_kg_m3,
        p.specific_heat_j_kg_k,
        p.emissivity,
    );
    out.push_str("temperature, C, by depth below the face\n    time s   flux kW/m2");
    for z in whole_micrometres(&probe.depth_m) {
        out.push_str(&format!("{:>9}", format!("{z} mm")));
    }
    out.push('\n');
    for (i, time) in probe.time_s.iter().enumerate() {
        out.push_str(&format!("{time:>10.1}{:>13.2}", probe.flux_w_m2[i] / W_PER_KW));
        for t in &probe.temperature_k[i] {
            out.push_str(&format!("{:>9.1}", celsius(*t)));
        }
        out.push('\n');
    }
    out.push_str(&format!(
        "\nabsorbed {:.2} MJ/m2; peak face {:.0} C; peak skin stress {:.0} MPa; peak normal tension {:.2} MPa against \
         {:.2} MPa\n",
        probe.absorbed_j_m2 / J_PER_MJ,
        celsius(probe.outcome.peak_surface_k),
        probe.outcome.peak_stress_pa / PA_PER_MPA,
        probe.outcome.peak_tension_pa / PA_PER_MPA,
        probe.outcome.strength_pa / PA_PER_MPA,
    ));
    if probe.events.is_empty() {
        out.push_str("no spall on the medians\n");
    }
    for e in events(probe) {
        out.push_str(&format!(
            "{} after {:.0} s, {:.1} mm, face at {:.0} C\n",
            e.family, e.time_s, e.depth_mm, e.surface_c
        ));
    }
    if let Some(run) = ensemble_run {
        let e = ensemble(run);
        out.push_str(&format!("\nensemble of {} draws, seed {}\n  {}\n", e.draws, e.seed, e.reason));
        let share = |x: Option<f64>| x.map_or_else(|| "not computed".to_owned(), |x| format!("{x:.3}"));
        out.push_str(&format!(
            "  spalls in a share of {} (sampling error {}): flake {}, slab {}, split {}, rind {}\n",
            share(e.p_spall),
            share(e.p_spall_se),
            share(e.p_flake),
            share(e.p_slab),
            share(e.p_split),
            share(e.p_rind)
        ));
    }
    if let Some(standing) = standing {
        out.push_str(&probe_source::text(standing));
        out.push('\n');
    }
    out.push_str(&format!(
        "energy balance {:.1e} of the heat exchanged, {} steps\n",
        probe.energy_balance_error, probe.steps
    ));
    out
}

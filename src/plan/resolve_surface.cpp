#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <set>

#include "resolve_parts.hpp"
#include "sunbudget/base/digest.hpp"
#include "sunbudget/raster/grid_build.hpp"
#include "sunbudget/tables/quality.hpp"

namespace sunbudget {

namespace {

/// "41 "Deciduous Forest" (1234 pixels)", the name where the file knows it.
std::string class_text(std::int32_t code, std::uint64_t pixels, const RasterInfo& info) {
    const auto name = info.class_names.find(code);
    const auto called =
        name == info.class_names.end() || name->second.empty() ? "" : " \"" + name->second + "\"";
    return fmt::format("{}{} ({} {})", code, called, pixels, pixels == 1 ? "pixel" : "pixels");
}

/// A table without a range has the albedo for both ends.
bool has_range(const SurfaceClass& row) {
    return row.albedo_low < row.albedo_high;
}

/// Standard uncertainty of what lies anywhere in a range: JCGM 100:2008, 4.3.7 (from memory).
double range_uncertainty(double low, double high) {
    return (high - low) / 2 / std::sqrt(3.0);
}

/// Table rows and the raster's classes brought together.
class CoverClasses {
  public:
    CoverClasses(const ClassTable& table, const SurfaceClass* default_class,
                 const CodeCounts& counts, const RasterInfo& info)
        : table_(table), default_(default_class), counts_(counts), info_(info) {}

    [[nodiscard]] std::vector<std::int32_t> unknown() const {
        std::vector<std::int32_t> codes;
        for (const auto& [code, pixels] : counts_.counts)
            if (table_.find(code) == nullptr) codes.push_back(code);
        return codes;
    }

    [[nodiscard]] Error unknown_error(bool sampled) const {
        const auto codes = unknown();
        std::vector<std::string> texts;
        for (const auto code : codes)
            texts.push_back(class_text(code, counts_.counts.at(code), info_));
        std::vector<int> present;
        for (const auto& entry : counts_.counts) present.push_back(entry.first);
        auto todo = fmt::format(
            "start from \"sunbudget tables {} --csv\" and add rows, or name a default_class",
            table_.name());
        if (const auto fitting = class_tables_with(present); !fitting.empty())
            todo = fmt::format("classes: {} has all of them; or {}", joined(fitting, ", "), todo);
        return {Cause::input,
                fmt::format(
                    "{} of {} {} no albedo in the table {}: {}{}",
                    codes.size() == 1 ? "one class" : fmt::format("{} classes", codes.size()),
                    info_.name.path.filename().string(), codes.size() == 1 ? "has" : "have",
                    table_.name(), joined(texts, ", "), sampled ? " in a sample of blocks" : ""),
                {},
                todo};
    }

    void fill(CoverSurface& cover, std::vector<ClassUse>& uses) const {
        std::vector<std::pair<std::int32_t, float>> albedo, uncertainty, source, emissivity, built,
            dry;
        const auto add_albedo = [&](std::int32_t code, const SurfaceClass& row) {
            albedo.emplace_back(code, static_cast<float>(row.albedo));
            if (has_range(row))
                uncertainty.emplace_back(
                    code, static_cast<float>(range_uncertainty(row.albedo_low, row.albedo_high)));
        };
        const auto add_heat = [&](std::int32_t code, const SurfaceClass& row) {
            emissivity.emplace_back(code, static_cast<float>(row.emissivity));
            if (is_built(row.kind)) built.emplace_back(code, static_cast<float>(row.emissivity));
            dry.emplace_back(code, is_dry(row.kind) ? 1.0F : 0.0F);
        };
        for (const auto& row : table_.rows()) {
            if (row.is_nodata()) continue;
            add_albedo(row.code, row);
            source.emplace_back(row.code, static_cast<float>(quality::class_table));
            add_heat(row.code, row);
        }
        for (const auto code : unknown()) {
            add_albedo(code, *default_);
            source.emplace_back(code, static_cast<float>(quality::default_class));
            add_heat(code, *default_);
        }
        cover.albedo = CodeValues(albedo);
        cover.albedo_uncertainty = CodeValues(uncertainty);
        cover.quality = CodeValues(source);
        cover.emissivity = CodeValues(emissivity);
        cover.built_emissivity = CodeValues(built);
        cover.dry = CodeValues(dry);
        for (const auto& [code, pixels] : counts_.counts) {
            const auto* row = table_.find(code);
            const auto* used = row == nullptr ? default_ : row;
            uses.push_back({code,
                            row == nullptr ? "default: " + used->name : used->name,
                            pixels,
                            used->is_nodata() ? std::nullopt : std::optional(used->albedo),
                            {},
                            {}});
            if (used->is_nodata() || !has_range(*used)) continue;
            uses.back().albedo_low = used->albedo_low;
            uses.back().albedo_high = used->albedo_high;
        }
    }

  private:
    const ClassTable& table_;
    const SurfaceClass* default_;
    const CodeCounts& counts_;
    const RasterInfo& info_;
};

const SurfaceClass* default_class_of(const PlanCover& plan, const ClassTable& table) {
    if (!plan.default_class || !**plan.default_class) return nullptr;
    const auto* found = table.find(***plan.default_class);
    if (found == nullptr || found->is_nodata())
        throw Error(Cause::usage,
                    fmt::format("default_class {} is no class with an albedo in the table {}",
                                ***plan.default_class, table.name()),
                    {}, fmt::format("see \"sunbudget tables {}\"", table.name()));
    return found;
}

void warn_of_local_albedo(const ClassTable& table, const std::vector<ClassUse>& uses, Run& run) {
    // A neighbourhood's albedo holds the light caught between its buildings; at the size of a facet
    // that no longer means anything.
    constexpr double facet_m = 5;
    const auto cell = cell_size(run.grid);
    if (std::max(cell.width_m, cell.height_m) >= facet_m) return;
    for (const auto& use : uses) {
        const auto* row = table.find(use.code);
        if (row == nullptr || row->is_nodata() || row->scale != Scale::local) continue;
        run.warnings.push_back(
            fmt::format("class {} \"{}\" has the albedo of a whole neighbourhood (scale local), "
                        "but the grid's cells are {:.1f} m: "
                        "single roofs and streets are not told apart by it",
                        use.code, use.name, cell.width_m));
        return;
    }
}

void resolve_cover(const PlanCover& plan, const ResolveOptions& options, Run& run,
                   RunProblems& problems) {
    std::optional<ClassTable> table;
    const SurfaceClass* default_class = nullptr;
    problems.attempt(plan.classes.place, [&] {
        if (const auto* name = std::get_if<std::string>(&*plan.classes))
            table.emplace(shipped_class_table(*name));
        else
            table.emplace(read_class_table(std::get<PlanPath>(*plan.classes).file));
    });
    if (table && plan.default_class)
        problems.attempt(plan.default_class->place,
                         [&] { default_class = default_class_of(plan, *table); });
    problems.attempt(plan.raster.place, [&] {
        SourceSpec spec;
        spec.name = raster_of(*plan.raster);
        spec.kind = DataKind::code;
        spec.limits = limits_of(options);
        CoverSurface cover{Source::open(spec, run.grid), {}, {}, {}, {}, {}, {}, false};
        cover.averaged = cover.codes.values_alignment() == Alignment::averaged;
        add_input(run, "surface.cover.raster", cover.codes);
        if (!table) return;
        constexpr int sampled_blocks = 64;
        const auto counts = options.scan_everything
                                ? count_codes(cover.codes, options.threads)
                                : sample_codes(cover.codes, options.threads, sampled_blocks);
        const CoverClasses classes(*table, default_class, counts, cover.codes.info());
        if (!classes.unknown().empty() && default_class == nullptr)
            throw classes.unknown_error(!options.scan_everything);
        classes.fill(cover, run.classes);
        warn_of_local_albedo(*table, run.classes, run);
        run.inputs.push_back({"surface.cover.classes", table->name(), table->digest(), {}, 1});
        run.surface.emplace<CoverSurface>(std::move(cover));
        run.methods.push_back(&method("albedo", "class-table"));
    });
}

void resolve_given(const PlanAlbedo& plan, const ResolveOptions& options, Run& run,
                   RunProblems& problems) {
    const auto uncertainty = plan.uncertainty ? std::optional(**plan.uncertainty) : std::nullopt;
    if (plan.value) {
        run.surface.emplace<GivenSurface>(GivenSurface{**plan.value, uncertainty});
        const auto* parameter = method("albedo", "given").parameter("value");
        if (judge(*parameter, **plan.value) == Verdict::unusual)
            run.warnings.push_back(fmt::format("surface.albedo.value: {} is outside the usual {}",
                                               **plan.value, parameter->usual.text()));
        run.methods.push_back(&method("albedo", "given"));
        return;
    }
    problems.attempt(plan.raster->place, [&] {
        SourceSpec spec;
        spec.name = raster_of(**plan.raster);
        spec.limits = limits_of(options);
        if (plan.scale || plan.offset)
            spec.scaling =
                Scaling{plan.scale ? **plan.scale : 1.0, plan.offset ? **plan.offset : 0.0};
        auto source = Source::open(spec, run.grid);
        add_input(run, "surface.albedo.raster", source);
        run.surface.emplace<GivenSurface>(GivenSurface{std::move(source), uncertainty});
        run.methods.push_back(&method("albedo", "given"));
    });
}

}  // namespace

const CoverSurface* cover_of(const Run& run) {
    if (const auto* cover = std::get_if<CoverSurface>(&run.surface)) return cover;
    const auto* image = std::get_if<ReflectanceSurface>(&run.surface);
    return image != nullptr && image->fill ? &*image->fill : nullptr;
}

void resolve_surface(const Plan& plan, const ResolveOptions& options, Run& run,
                     RunProblems& problems) {
    if (plan.surface.cover) resolve_cover(*plan.surface.cover, options, run, problems);
    if (plan.surface.reflectance)
        resolve_reflectance(*plan.surface.reflectance, options, run, problems);
    if (plan.surface.albedo) resolve_given(*plan.surface.albedo, options, run, problems);
}

}  // namespace sunbudget

#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "resolve_parts.hpp"
#include "sunbudget/base/digest.hpp"
#include "sunbudget/raster/grid_build.hpp"

namespace sunbudget {

namespace {

/// What is left of a roof's albedo after three years, where only the new one is known: California's Title 24,
/// part 6, with its factor for products that are not coated in place (from memory).
double aged_from(double initial) {
    return 0.20 + 0.70 * (initial - 0.20);
}

std::optional<double> number_of(const Maybe<double>& given) {
    return given ? std::optional(**given) : std::nullopt;
}

/// One change of the plan, with what it says of albedo brought together.
class ChangeResolver {
  public:
    ChangeResolver(const Plan& plan, const PlanChange& wanted, const ResolveOptions& options,
                   Run& run)
        : plan_(plan),
          wanted_(wanted),
          options_(options),
          run_(run),
          role_("changes." + *wanted.name) {}

    /// First, where the change has polygons.
    void find_polygons();
    void resolve() {
        change_.name = *wanted_.name;
        if (wanted_.treatable) change_.treatable = **wanted_.treatable;
        change_.lifetime_years = number_of(wanted_.lifetime);
        change_.cost_per_m2 = number_of(wanted_.cost);
        if (plan_.surface.cover) read_table();
        find_height();
        find_albedo();
        find_heat();
        find_classes();
        const auto text = described();
        add_change(run_, change_, text);
        for (const auto& [case_name, albedo] : cases_) {
            auto other = change_;
            other.case_name = case_name;
            set_albedo(other, albedo);
            add_change(run_, std::move(other), text);
        }
        run_.assumptions.push_back(text);
    }

  private:
    void read_table();
    void find_height();
    void find_albedo();
    void find_heat();
    void find_classes();
    using ClassValues = std::vector<std::pair<std::int32_t, float>>;
    [[nodiscard]] ClassValues of_classes(const CodeValues& values) const;
    [[nodiscard]] static CodeValues changed(const Change& change, ClassValues values,
                                            double treated);
    void set_albedo(Change& change, double albedo) const;
    [[nodiscard]] std::string albedo_words() const;
    [[nodiscard]] std::string height_words() const;
    [[nodiscard]] std::string described() const;

    const Plan& plan_;
    const PlanChange& wanted_;
    const ResolveOptions& options_;
    Run& run_;
    std::string role_;
    Change change_;
    std::optional<ClassTable> table_;
    ClassValues class_albedo_;  ///< of every class of the run, as it is
    std::vector<std::pair<std::string, double>> cases_;
};

void ChangeResolver::find_polygons() {
    const auto& where = *wanted_.where;
    const PolygonName name{where.file->value.file, where.layer ? **where.layer : std::string(),
                           where.query ? **where.query : std::string()};
    const auto file = inspect_polygons(name);
    PolygonsWanted fields;
    if (wanted_.height && wanted_.height->attribute)
        fields.number_fields = {**wanted_.height->attribute};
    auto polygons = read_polygons(name, run_.grid, fields);
    if (polygons.all.empty())
        throw Error(Cause::input, "no polygon is chosen", name.path.string(),
                    "look at the query, the layer and the shapes");
    run_.inputs.push_back({role_ + ".where.file",
                           name.path.filename().string(),
                           input_digest(name.path),
                           {fmt::format("{}, layer {}, {} features, {}", file.driver, file.layer,
                                        file.features, crs_name(file.crs_wkt))},
                           1});
    for (const auto& note : polygons.notes) run_.warnings.push_back(role_ + ".where: " + note);
    change_.where = std::make_shared<const TreatedArea>(std::move(polygons.all), run_.grid);
    if (!change_.where->touches({0, 0, run_.grid.width, run_.grid.height}))
        throw Error(Cause::input, "none of the polygons lies on the grid", name.path.string(),
                    "look at the CRS of both");
}

void ChangeResolver::read_table() {
    const auto& classes = *plan_.surface.cover->classes;
    const auto* name = std::get_if<std::string>(&classes);
    table_.emplace(name != nullptr ? shipped_class_table(*name)
                                   : read_class_table(std::get<PlanPath>(classes).file));
    for (const auto& row : table_->rows())
        if (!row.is_nodata()) class_albedo_.emplace_back(row.code, static_cast<float>(row.albedo));
    for (const auto& use : run_.classes)
        if (use.albedo && table_->find(use.code) == nullptr)
            class_albedo_.emplace_back(use.code, static_cast<float>(*use.albedo));
}

void ChangeResolver::find_height() {
    if (!wanted_.height) return;
    HeightChange height;
    if (wanted_.height->add) height.add_m = (**wanted_.height->add).m;
    height.add_numbers = wanted_.height->attribute.has_value();
    if (wanted_.height->raster) {
        SourceSpec spec;
        spec.name = raster_of(**wanted_.height->raster);
        spec.limits = limits_of(options_);
        height.instead.push_back(Source::open(spec, run_.grid));
        add_input(run_, role_ + ".height.raster", height.instead.back());
    }
    change_.height = std::move(height);
}

void ChangeResolver::find_albedo() {
    if (wanted_.to_class) {
        const auto* row = table_->find(**wanted_.to_class);
        if (row == nullptr || row->is_nodata())
            throw Error(Cause::usage,
                        fmt::format("the table {} has no class {} with an albedo", table_->name(),
                                    **wanted_.to_class),
                        {}, fmt::format("see \"sunbudget tables {}\"", table_->name()));
        change_.albedo = row->albedo;
        if (row->albedo_low < row->albedo) cases_.emplace_back("low", row->albedo_low);
        if (row->albedo_high > row->albedo) cases_.emplace_back("high", row->albedo_high);
    }
    if (!wanted_.albedo) return;
    const auto& albedo = *wanted_.albedo;
    if (albedo.initial) cases_.emplace_back("initial", **albedo.initial);
    if (albedo.low) cases_.emplace_back("low", **albedo.low);
    if (albedo.high) cases_.emplace_back("high", **albedo.high);
    change_.albedo = albedo.aged ? **albedo.aged : aged_from(**albedo.initial);
}

/// Emissivity and dryness, where the run has use for them.
void ChangeResolver::find_heat() {
    const auto* row = wanted_.to_class ? table_->find(**wanted_.to_class) : nullptr;
    if (row != nullptr) change_.dry = is_dry(row->kind) ? 1 : 0;
    const auto& has = run_.heat.emissivity;
    if (wanted_.emissivity && has) change_.emissivity = **wanted_.emissivity;
    if (wanted_.emissivity && !has) {
        if (!change_.albedo && !change_.height)
            throw Error(Cause::usage,
                        "the change changes nothing: no layer of the run needs an emissivity", {},
                        "add longwave_up, net_longwave, net_radiation, emissivity or sri to "
                        "outputs.layers");
        run_.warnings.push_back(role_ +
                                ".emissivity: no layer of the run needs one, it changes nothing");
    }
    const bool by_class = has && (std::holds_alternative<ClassEmissivity>(*has) ||
                                  std::holds_alternative<NdviEmissivity>(*has));
    if (row == nullptr || wanted_.emissivity || !by_class) return;
    if (std::isnan(row->emissivity))
        throw Error(Cause::usage,
                    fmt::format("the table {} has no emissivity for class {}", table_->name(),
                                **wanted_.to_class),
                    {}, "give emissivity beside class");
    change_.emissivity = row->emissivity;
}

ChangeResolver::ClassValues ChangeResolver::of_classes(const CodeValues& values) const {
    auto all = class_albedo_;
    for (auto& [code, value] : all) value = values.of(code);
    return all;
}

void ChangeResolver::find_classes() {
    if (!wanted_.where || !wanted_.where->classes) return;
    const auto& wanted = **wanted_.where->classes;
    for (const int code : wanted)
        if (std::ranges::none_of(class_albedo_, [&](const auto& one) { return one.first == code; }))
            throw Error(
                Cause::usage,
                fmt::format("the table {} has no class {} with an albedo", table_->name(), code),
                {}, fmt::format("see \"sunbudget tables {}\"", table_->name()));
    const auto* cover = cover_of(run_);
    auto listed = class_albedo_;
    for (auto& [code, value] : listed)
        value = std::ranges::find(wanted, code) != wanted.end() ? 1.0f : 0.0f;
    change_.classes = ChangedClasses{cover->codes, CodeValues(listed)};
    if (change_.albedo) set_albedo(change_, *change_.albedo);
    if (change_.emissivity && std::holds_alternative<ClassEmissivity>(*run_.heat.emissivity))
        change_.classes->emissivity_after =
            changed(change_, of_classes(cover->emissivity), *change_.emissivity);
    if (change_.dry)
        change_.classes->dry_after = changed(change_, of_classes(cover->dry), *change_.dry);
}

/// What each class has once the listed ones are treated.
CodeValues ChangeResolver::changed(const Change& change, ClassValues values, double treated) {
    for (auto& [code, value] : values)
        if (change.classes->listed.of(code) > 0) {
            const auto before = static_cast<double>(value);
            value = static_cast<float>(
                change.treatable == 1 ? treated : before + change.treatable * (treated - before));
        }
    return CodeValues(values);
}

void ChangeResolver::set_albedo(Change& change, double albedo) const {
    change.albedo = albedo;
    if (!change.classes || !std::holds_alternative<CoverSurface>(run_.surface)) return;
    change.classes->albedo_after = changed(change, class_albedo_, albedo);
}

std::string ChangeResolver::albedo_words() const {
    auto text = fmt::format("albedo {:.6g}", *change_.albedo);
    if (wanted_.albedo && !wanted_.albedo->aged)
        text += fmt::format(", aged from {} after 0.20 + 0.70 (initial - 0.20)",
                            shortest(**wanted_.albedo->initial));
    if (wanted_.to_class) text += fmt::format(" of class {}", **wanted_.to_class);
    return text;
}

std::string ChangeResolver::height_words() const {
    const auto& height = *change_.height;
    if (height.add_m) return "heights " + shortest(*height.add_m) + " m more";
    if (height.add_numbers) return "heights more by " + **wanted_.height->attribute;
    return "heights of " + (**wanted_.height->raster).path.file.filename().string();
}

std::string ChangeResolver::described() const {
    std::vector<std::string> parts;
    if (change_.albedo) parts.push_back(albedo_words());
    if (change_.emissivity) {
        parts.push_back("emissivity " + shortest(*change_.emissivity));
        if (!wanted_.emissivity) parts.back() += fmt::format(" of class {}", **wanted_.to_class);
    }
    if (change_.height) parts.push_back(height_words());
    auto text = "change " + change_.name + ": " + joined(parts, "; ");
    if (change_.treatable < 1)
        text += fmt::format("; on {} % of the place", shortest(change_.treatable * 100));
    if (change_.where)
        text += fmt::format("; inside {} polygons", change_.where->polygons().size());
    if (change_.classes) {
        std::vector<std::string> codes;
        for (const int code : **wanted_.where->classes) codes.push_back(std::to_string(code));
        text += "; classes " + joined(codes, ", ");
    }
    return text;
}

}  // namespace

void resolve_changes(const Plan& plan, const ResolveOptions& options, Run& run,
                     RunProblems& problems) {
    for (const auto& change : plan.changes) {
        ChangeResolver resolver(plan, change, options, run);
        const bool has_polygons = change.where && change.where->file;
        if (!has_polygons ||
            problems.attempt(change.where->file->place, [&] { resolver.find_polygons(); }))
            problems.attempt(change.name.place, [&] { resolver.resolve(); });
    }
    const bool given =
        run.heat.surface == SurfaceFrom::air || run.heat.surface == SurfaceFrom::raster;
    if (given && std::ranges::any_of(run.layers, [](const auto& layer) {
            return layer.changed && layer.layer->needs_surface_temperature;
        }))
        run.assumptions.emplace_back(
            "changes: the ground's temperature stays as given; only surface_temperature: {from: "
            "balance} lets it follow");
}

}  // namespace sunbudget

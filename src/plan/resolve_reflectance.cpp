#include <fmt/format.h>

#include <algorithm>
#include <utility>

#include "reflectance.hpp"
#include "resolve_parts.hpp"
#include "sunbudget/base/digest.hpp"
#include "sunbudget/base/text.hpp"
#include "sunbudget/raster/plausibility.hpp"
#include "sunbudget/raster/product.hpp"

namespace sunbudget {

namespace {

/// Of the target grid, for judging the values: what is wrong with a whole scene shows in any of them,
/// and each costs the decoding of all bands.
constexpr int plausibility_blocks = 16;

DeclaredProduct declared(const PlanReflectance& image) {
    switch (**image.product) {
        case ProductChoice::surface_reflectance:
            return DeclaredProduct::surface_reflectance;
        case ProductChoice::top_of_atmosphere:
            return DeclaredProduct::top_of_atmosphere;
        case ProductChoice::automatic:
            break;
    }
    return DeclaredProduct::automatic;
}

/// A band that has a weight, as it is looked at before its pixels are.
struct UsedBand {
    ImageFile file;
    double weight = 0;
    Product product;
    PixelType type = PixelType::f32;
};

/// Resolves one image, step by step.
class ImageResolver {
  public:
    ImageResolver(const PlanReflectance& image, const ResolveOptions& options, Run& run,
                  RunProblems& problems)
        : image_(image),
          options_(options),
          run_(run),
          problems_(problems),
          profile_(sensor(*image.sensor)) {}

    void resolve() {
        surface_.weights = weights_of(image_);
        if (!problems_.attempt(image_.place, [&] { files_ = image_files(image_); })) return;
        if (!look_at_bands() || !judge_products() || !open_bands() || !open_quality()) return;
        judge_values();
        say_what_is_left_open();
        surface_.facts.sensor = profile_.name;
        collect_facts();
        if (auto* cover = std::get_if<CoverSurface>(&run_.surface))
            surface_.fill = std::move(*cover);
        run_.methods.push_back(&method("albedo", surface_.weights.name));
        run_.surface.emplace<ReflectanceSurface>(std::move(surface_));
    }

  private:
    bool look_at_bands();
    bool judge_products();
    bool open_bands();
    bool open_band(const UsedBand& band);
    bool open_quality();
    void open_quality_raster(const ImageFile& file);
    [[nodiscard]] std::vector<QualityBits> tests_of(const std::string& raster);
    [[nodiscard]] bool rejects(const QualityTest& test) const;
    [[nodiscard]] const ImageFile* quality_file(const std::string& raster) const;
    void judge_values();
    void say_what_is_left_open();
    void collect_facts();

    [[nodiscard]] Product recognised(const ImageFile& file, const RasterInfo& info) const {
        const auto mtl = image_.mtl ? std::optional(image_.mtl->value.file) : std::nullopt;
        return recognise(file.raster.path, mtl, info.metadata);
    }
    /// The key in the metadata: a scene's files are told apart by the band.
    [[nodiscard]] static std::string role_of(const ImageFile& file) {
        return file.place.key.ends_with(".scene") ? file.place.key + " " + file.name
                                                  : file.place.key;
    }

    const PlanReflectance& image_;
    const ResolveOptions& options_;
    Run& run_;
    RunProblems& problems_;
    const Sensor& profile_;
    ImageFiles files_;
    std::vector<UsedBand> bands_;
    ReflectanceSurface surface_;
};

bool ImageResolver::look_at_bands() {
    bool good = true;
    std::vector<std::string> missing;
    for (const auto& weight : surface_.weights.weights) {
        const auto file = std::ranges::find(files_.bands, weight.band, &ImageFile::name);
        if (file == files_.bands.end()) {
            missing.push_back(weight.band);
            continue;
        }
        good = problems_.attempt(file->place, [&] {
            const auto info = inspect(file->raster, limits_of(options_));
            bands_.push_back({*file, weight.weight, recognised(*file, info), info.type});
        }) && good;
    }
    for (const auto& file : files_.bands)
        if (std::ranges::find(surface_.weights.weights, file.name, &BandWeight::band) ==
            surface_.weights.weights.end())
            run_.assumptions.push_back(
                fmt::format("{}: {} has no weight for this band, it is left alone", file.place.key,
                            surface_.weights.name));
    if (missing.empty()) return good;
    problems_.add(Cause::usage, image_.bands ? image_.bands->place : image_.place,
                  fmt::format("{} needs the {} {} too", surface_.weights.name,
                              missing.size() == 1 ? "band" : "bands", joined(missing, ", ")),
                  "name them, or give weights for the bands there are");
    // What else is wrong with the bands that are there is worth knowing now.
    (void)judge_products();
    return false;
}

bool ImageResolver::judge_products() {
    BandRules rules{declared(image_), profile_.name, {}, sensor_names()};
    for (const auto& band : profile_.bands)
        if (!band.product.empty()) rules.roles.push_back({band.name, band.product});
    std::vector<BandFile> files;
    for (const auto& band : bands_) files.push_back({band.file.name, band.product, band.type});
    return problems_.attempt(image_.place,
                             [&] { refuse_unless_surface_reflectance(files, rules); });
}

bool ImageResolver::open_band(const UsedBand& band) {
    return problems_.attempt(band.file.place, [&] {
        SourceSpec spec;
        spec.name = band.file.raster;
        spec.limits = limits_of(options_);
        if (profile_.name != "generic")
            spec.profile_scaling = Scaling{profile_.scale, profile_.offset};
        if (image_.scale)
            spec.scaling =
                Scaling{**image_.scale, image_.offset ? **image_.offset : profile_.offset};
        if (image_.nodata) spec.nodata = **image_.nodata;
        spec.profile_nodata = profile_.fill;
        auto source = Source::open(spec, run_.grid);
        add_input(run_, role_of(band.file), source);
        auto& notes = run_.inputs.back().notes;
        notes.insert(notes.end(), band.product.evidence.begin(), band.product.evidence.end());
        if (band.product.level == ProductLevel::unknown)
            notes.emplace_back("surface reflectance: declared by the plan");
        if (const auto warning = scaling_warning(band.product, source.scaling()))
            run_.warnings.push_back(role_of(band.file) + ": " + *warning);
        surface_.bands.push_back({band.file.name, band.weight, std::move(source)});
    });
}

bool ImageResolver::open_bands() {
    bool good = true;
    for (const auto& band : bands_) good = open_band(band) && good;
    return good;
}

const ImageFile* ImageResolver::quality_file(const std::string& raster) const {
    const auto file = std::ranges::find(files_.quality, raster, &ImageFile::name);
    return file == files_.quality.end() ? nullptr : &*file;
}

bool ImageResolver::rejects(const QualityTest& test) const {
    if (test.name == "fill") return true;
    if (!image_.reject) return test.rejects;
    return std::ranges::find(**image_.reject, test.name) != (**image_.reject).end();
}

/// The tests of a raster that matter for the bands in use.
std::vector<QualityBits> ImageResolver::tests_of(const std::string& raster) {
    std::vector<QualityBits> bits;
    for (std::size_t n = 0; n < profile_.tests.size(); ++n) {
        const auto& test = profile_.tests[n];
        const bool used = test.band.empty() ||
                          std::ranges::find(surface_.bands, test.band, &ReflectanceBand::name) !=
                              surface_.bands.end();
        if (test.raster != raster || !used) continue;
        const bool rejecting = rejects(test);
        bits.push_back({test.first_bit, test.bits, static_cast<std::int32_t>(test.value), test.flag,
                        rejecting ? static_cast<RejectReason>(n) : not_rejected});
        if (!rejecting || test.flag == 0) continue;
        surface_.rejecting |= test.flag;
        auto& names = surface_.facts.rejected;
        if (std::ranges::find(names, test.name) == names.end()) names.push_back(test.name);
    }
    return bits;
}

void ImageResolver::open_quality_raster(const ImageFile& file) {
    SourceSpec spec;
    spec.name = file.raster;
    spec.kind = DataKind::code;
    spec.limits = limits_of(options_);
    const auto product = recognised(file, inspect(spec.name, spec.limits));
    if (!product.band.empty() && product.band != file.name)
        throw Error(Cause::input, fmt::format("this is {}, not {}", product.band, file.name),
                    file.raster.path.string(), "name the right file");
    const auto& id = bands_.front().product.id;
    if (!product.id.empty() && !id.empty() && product.id != id)
        throw Error(Cause::input,
                    fmt::format("quality of the scene {}, but the bands are of {}", product.id, id),
                    file.raster.path.string(), "take all files from one scene");
    auto source = Source::open(spec, run_.grid);
    add_input(run_, role_of(file), source);
    // Outside the main raster nothing is known of a pixel; the others only add doubts.
    const auto missing = file.name == "QA_PIXEL" ? RejectReason{0} : not_rejected;
    surface_.quality.push_back({std::move(source), tests_of(file.name), missing});
}

bool ImageResolver::open_quality() {
    bool good = true;
    for (const auto& file : files_.quality)
        good = problems_.attempt(file.place, [&] { open_quality_raster(file); }) && good;
    if (!image_.reject) return good;
    for (const auto& test : profile_.tests)
        if (test.name != "fill" && test.band.empty() && rejects(test) &&
            quality_file(test.raster) == nullptr) {
            problems_.add(Cause::input, image_.reject->place,
                          fmt::format("{} is told by {}, which the scene does not have", test.name,
                                      test.raster),
                          "fetch that file, or leave it out");
            good = false;
        }
    return good;
}

void ImageResolver::judge_values() {
    std::vector<SampledBand> sampled;
    for (const auto& band : surface_.bands) sampled.push_back({band.name, &band.reflectance});
    problems_.attempt(image_.place, [&] {
        const auto sample = sample_reflectance(sampled, options_.threads, plausibility_blocks);
        for (const auto& range : ranges_of(sample)) {
            const auto band = std::ranges::find(bands_, range.role,
                                                [](const auto& used) { return used.file.name; });
            const auto input =
                std::ranges::find(run_.inputs, role_of(band->file), &InputFile::role);
            input->notes.push_back(
                fmt::format("values{}: {}", sample.whole ? "" : " of a sample", text_of(range)));
        }
        const auto warnings = plausibility_warnings(sample);
        const bool stops = **image_.implausible == Implausible::stop;
        std::vector<Problem> found;
        for (const auto& warning : warnings) {
            if (stops)
                found.push_back({"the values are unlike surface reflectance: " + warning,
                                 {},
                                 "correct product, scale and offset; if the values are right, add "
                                 "implausible: allow"});
            else
                run_.warnings.push_back("surface.reflectance: implausible, but allowed: " +
                                        warning);
        }
        if (!found.empty()) throw Error(Cause::input, std::move(found));
    });
}

void ImageResolver::say_what_is_left_open() {
    if (files_.quality.empty())
        run_.warnings.push_back(profile_.tests.empty()
                                    ? "surface.reflectance: nothing tells clouds and their "
                                      "shadows: they count as ground"
                                    : "surface.reflectance: no quality raster: clouds and their "
                                      "shadows count as ground");
    else if (quality_file("QA_PIXEL") == nullptr && !profile_.tests.empty())
        run_.warnings.emplace_back(
            "surface.reflectance: quality is not named: clouds and their shadows count as ground");
    if (surface_.weights.name == "own-weights")
        run_.assumptions.push_back(
            fmt::format("surface.reflectance.weights: their error is not known, {} is taken",
                        surface_.weights.fit_error));
    if (!surface_.facts.rejected.empty())
        run_.assumptions.push_back(
            fmt::format("surface.reflectance.reject: {}", joined(surface_.facts.rejected, ", ")));
}

/// From the first band that tells; the metadata file counts as an input, since these come from it.
void ImageResolver::collect_facts() {
    auto& facts = surface_.facts;
    const auto known = std::ranges::find_if(bands_, [](const auto& band) {
        return !band.product.id.empty() || !band.product.metadata_file.empty();
    });
    if (known == bands_.end()) return;
    const auto& product = known->product;
    facts.scene = product.id;
    facts.acquired_utc = product.acquired_utc;
    facts.date = product.date;
    facts.sun_elevation_deg = product.sun_elevation_deg;
    facts.sun_azimuth_deg = product.sun_azimuth_deg;
    if (!product.metadata_file.empty())
        run_.inputs.push_back({"surface.reflectance.mtl",
                               product.metadata_file.filename().string(),
                               input_digest(product.metadata_file),
                               {},
                               1});
}

}  // namespace

void resolve_reflectance(const PlanReflectance& image, const ResolveOptions& options, Run& run,
                         RunProblems& problems) {
    ImageResolver(image, options, run, problems).resolve();
}

std::map<std::string, std::string> reflectance_metadata(const ReflectanceSurface& surface) {
    const auto& facts = surface.facts;
    std::vector<std::string> weights;
    for (const auto& band : surface.bands)
        weights.push_back(band.name + " " + shortest(band.weight));
    std::map<std::string, std::string> items{
        {"sensor", facts.sensor},
        {"albedo_weights",
         joined(weights, ", ") + ", constant " + shortest(surface.weights.constant)},
        {"albedo_weights_note", surface.weights.text},
        {"albedo_fit_error", shortest(surface.weights.fit_error) + ", one standard deviation"}};
    if (!facts.rejected.empty()) items["rejected"] = joined(facts.rejected, ", ");
    if (!facts.scene.empty()) items["scene"] = facts.scene;
    if (facts.acquired_utc)
        items["acquired"] = format_utc(*facts.acquired_utc);
    else if (facts.date)
        items["acquired"] = format_date(*facts.date);
    return items;
}

}  // namespace sunbudget

# ITK's and OpenCV's pixel containers, as the two targets wavefount_itk and wavefount_opencv. Used by
# the build and, installed, by the package that plug-ins outside the tree find.
find_package(ITK 5.2 REQUIRED COMPONENTS ITKCommon)
add_library(wavefount_itk INTERFACE IMPORTED GLOBAL)
target_include_directories(wavefount_itk SYSTEM INTERFACE ${ITK_INCLUDE_DIRS})
target_link_libraries(wavefount_itk INTERFACE ITKCommon)

find_path(OPENCV_INCLUDE_DIR opencv2/core.hpp PATH_SUFFIXES opencv4 REQUIRED)
find_library(OPENCV_CORE opencv_core REQUIRED)
find_library(OPENCV_IMGPROC opencv_imgproc REQUIRED)
add_library(wavefount_opencv INTERFACE IMPORTED GLOBAL)
target_include_directories(wavefount_opencv SYSTEM INTERFACE ${OPENCV_INCLUDE_DIR})
target_link_libraries(wavefount_opencv INTERFACE ${OPENCV_CORE} ${OPENCV_IMGPROC})
